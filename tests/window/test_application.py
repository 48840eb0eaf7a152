import io
import signal
import struct
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest

from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.resources import bundled_folder
from airfield_board.session.board_state import BoardState, Mode, StatusChange
from airfield_board.window import application, preflight
from airfield_board.window.application import DEMO_PICTURE, run_demo, run_window, write_changes
from airfield_board.window.preflight import Missing, MissingLibraries, NoDisplay
from tests.interpreter import run_python
from tests.window.states import board

NO_SCREEN = {"DISPLAY": None, "WAYLAND_DISPLAY": None, "QT_QPA_PLATFORM": None}
linux_only = pytest.mark.skipif(not sys.platform.startswith("linux"), reason="elsewhere there always is a display")

WINDOW_THAT_CLOSES = """
import sys
from airfield_board.cli import main
from airfield_board.window import application, main_window, preflight

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)
begin = main_window.MainWindow.start

def start(self):
    begin(self)
    if sys.argv[1] == "close":
        self.worker.state_came.connect(lambda _: self.close())
    else:
        self.worker.state_came.connect(lambda _: print("ready", flush=True))

main_window.MainWindow.start = start
sys.exit(main(sys.argv[2:]))
"""

WINDOW_THAT_FAULTS = """
import sys
from airfield_board.cli import main
from airfield_board.window import application, board_view, main_window, preflight

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)

def show_state(self, state, now):
    raise ZeroDivisionError("on purpose")

board_view.BoardView.show_state = show_state
tell = main_window.MainWindow.show_fault

def show_fault(self, fault):
    tell(self, fault)
    if self.isVisible():
        print("NO DATA page:" if self.fault_page.isVisible() else "board:", fault)
    self.close()

main_window.MainWindow.show_fault = show_fault
sys.exit(main(sys.argv[1:]))
"""


@pytest.fixture
def field(tmp_path: Path) -> Iterator[Path]:
    """A copy of the demo's field, with its history beside it."""
    for name in ("profile.yaml", "fleet.yaml", "observations.csv"):
        (tmp_path / name).write_bytes((bundled_folder("demo_data") / name).read_bytes())
    yield tmp_path / "profile.yaml"


@pytest.fixture(scope="module")
def played(tmp_path_factory: pytest.TempPathFactory) -> tuple[subprocess.CompletedProcess[str], Path]:
    folder = tmp_path_factory.mktemp("here")
    done = run_python(["-m", "airfield_board", "--demo"], environment=NO_SCREEN, folder=str(folder))
    return done, folder


@linux_only
def test_without_a_display_the_demo_plays_in_the_terminal_and_ends_well(
    played: tuple[subprocess.CompletedProcess[str], Path],
) -> None:
    done, _folder = played
    assert done.stderr == ""
    assert done.returncode == 0
    lines = done.stdout.splitlines()
    assert any("invented" in line for line in lines)
    holds = [line for line in lines if line[7:].startswith("HOLD")]
    assert any("Two-seat trainer · Solo circuits" in line for line in holds)
    times = [line[:5] for line in lines if line[2:3] == ":"]
    assert times == sorted(times)
    assert "Limits of the air only" in done.stdout
    assert "flight manual" in done.stdout


@linux_only
def test_the_terminals_demo_paints_the_board_and_says_where(
    played: tuple[subprocess.CompletedProcess[str], Path],
) -> None:
    done, folder = played
    picture = folder / DEMO_PICTURE
    assert str(picture) in done.stdout
    content = picture.read_bytes()
    assert content[:8] == b"\x89PNG\r\n\x1a\n"
    assert struct.unpack(">II", content[16:24]) == (1440, 900)
    assert [each.name for each in folder.iterdir()] == [DEMO_PICTURE]


@linux_only
def test_without_a_display_the_plain_window_names_the_commands_that_need_none(field: Path) -> None:
    done = run_python(["-m", "airfield_board", "--airfield", str(field)], environment=NO_SCREEN)
    assert done.returncode == 2
    assert done.stdout == ""
    for command in ("assess", "snapshot", "replay", "--demo"):
        assert command in done.stderr


def test_a_missing_library_is_named_with_its_package_and_the_demo_does_not_start(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(application, "find_screens", lambda _: ())
    monkeypatch.setattr(preflight, "missing_libraries", lambda _: (Missing(library="libGL.so.1", package="libgl1"),))
    out = io.StringIO()
    with pytest.raises(MissingLibraries, match="libgl1"):
        run_demo(out=out)
    assert out.getvalue() == ""


def test_a_profile_that_is_wrong_is_told_before_any_window(tmp_path: Path) -> None:
    done = run_python(["-m", "airfield_board", "--airfield", str(tmp_path / "none.yaml")])
    assert done.returncode == 2
    assert "none.yaml" in done.stderr
    assert "Traceback" not in done.stderr


def test_a_window_without_a_display_is_refused(field: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("QT_QPA_PLATFORM", "offscreen")
    with pytest.raises(NoDisplay):
        run_window(field)


def test_the_window_opens_reads_records_and_closes(field: Path) -> None:
    done = run_python(["-c", WINDOW_THAT_CLOSES, "close", "--airfield", str(field), "--scheme", "dark"])
    assert done.stderr.replace("This plugin does not support propagateSizeHints()\n", "") == ""
    assert done.returncode == 0
    assert kinds(field.parent / "history.db")[-1] == "stop"


def test_the_demo_opens_in_the_window_and_leaves_nothing_behind(tmp_path: Path) -> None:
    done = run_python(
        ["-c", WINDOW_THAT_CLOSES, "close", "--demo"],
        environment={"TMPDIR": str(tmp_path)},
        folder=str(tmp_path),
    )
    assert done.returncode == 0
    assert "Traceback" not in done.stderr
    assert list(tmp_path.iterdir()) == []


def test_a_fault_while_showing_the_board_takes_the_board_away(field: Path) -> None:
    done = run_python(["-c", WINDOW_THAT_FAULTS, "--airfield", str(field)])
    assert "ZeroDivisionError" in done.stderr
    assert done.stdout == "NO DATA page: ZeroDivisionError: on purpose\n"
    assert done.returncode == 0


@linux_only
def test_being_told_to_end_closes_the_history_in_order(field: Path) -> None:
    with subprocess.Popen(  # noqa: S603  our own interpreter and code
        [sys.executable, "-c", WINDOW_THAT_CLOSES, "stay", "--airfield", str(field)],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        text=True,
    ) as process:
        assert process.stdout is not None
        assert process.stdout.readline() == "ready\n"
        process.send_signal(signal.SIGTERM)
        assert process.wait(timeout=60) == 0
    assert kinds(field.parent / "history.db")[-1] == "stop"


def kinds(path: Path) -> list[str]:
    history = History.open_read_only(path)
    try:
        return [str(entry.kind) for entry in history.records()]
    finally:
        history.close()


def with_changes(state: BoardState, *changes: StatusChange) -> BoardState:
    return replace(state, mode=Mode.DEMO, changes=changes)


def change(number: int, minutes: int, state: State) -> StatusChange:
    return StatusChange(
        number=number,
        time=board().assessed_at + timedelta(minutes=minutes),
        state=state,
        was=State.GO,
        label="Tow plane · Aerotow",
        needs_acknowledgement=False,
    )


def test_each_change_is_written_once_the_oldest_first() -> None:
    first, second, third = change(1, 0, State.NEAR), change(2, 5, State.HOLD), change(3, 9, State.NEAR)
    out = io.StringIO()
    boards = [with_changes(board(), first), with_changes(board(), third, second, first)]
    last = write_changes(boards, out)
    assert last is boards[-1]
    words = [line.split()[:2] for line in out.getvalue().splitlines()]
    assert words == [["13:20", "NEAR"], ["13:25", "HOLD"], ["13:29", "NEAR"]]


def test_a_day_without_a_board_is_a_fault_of_the_program() -> None:
    with pytest.raises(ValueError, match="no board"):
        write_changes([], io.StringIO())
