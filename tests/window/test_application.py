import io
import os
import signal
import struct
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import replace
from datetime import timedelta
from pathlib import Path
from types import SimpleNamespace

import pytest

from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError
from airfield_board.history.store import History
from airfield_board.limits.states import State
from airfield_board.resources import bundled_folder
from airfield_board.session.board_state import BoardState, Mode, StatusChange
from airfield_board.session.last_profile import LastProfile
from airfield_board.window import application, preflight
from airfield_board.window.application import DEMO_PICTURE, run_demo, run_window, write_changes
from airfield_board.window.next_window import AirfieldNext, DemoNext, NextWindow, SetUpNext
from airfield_board.window.preflight import Missing, MissingLibraries, NoDisplay, Screen
from airfield_board.window.text_size import TextSize
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

# Plays what a person does in one window after the other, given as words; says which window each was.
WINDOWS_ONE_AFTER_THE_OTHER = """
import sys
from pathlib import Path
from PySide6.QtCore import QTimer
from airfield_board.cli import main
from airfield_board.window import application, main_window, preflight, set_up_window

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)
application.platformdirs.user_documents_dir = lambda: sys.argv[1]
steps = iter(sys.argv[2].split(";"))
begin, begin_set_up = main_window.MainWindow.start, set_up_window.SetUpWindow.start

def act(window):
    word, _, path = next(steps, "close").partition("=")
    if word == "open":
        (window.others.opener if hasattr(window, "others") else window.opener).open(Path(path))
    elif word == "demo":
        window.card.demo.click()
    elif word == "answer":
        for name, text in (("name", "New Field"), ("elevation", "4120"), ("time_zone", "America/Los_Angeles"),
                           ("observation_file", "o.csv"), ("aircraft", "Glider"), ("limit", "6000")):
            window.card.fields[name].set_text(text)
        window.card.fields["folder"].set_text(path)
        window.card.show_step(2)
        window.card.go_on()
    else:
        window.close()

def start(self):
    begin(self)
    acted = []
    def came(state):
        if not acted:
            acted.append(state)
            print("board:", state.airfield.name, state.mode, flush=True)
            act(self)
    self.worker.state_came.connect(came)

def start_set_up(self):
    begin_set_up(self)
    print("set-up:", self.card.note.text().replace("\\n", " "), flush=True)
    QTimer.singleShot(0, lambda: act(self))

main_window.MainWindow.start = start
set_up_window.SetUpWindow.start = start_set_up
for kind in (main_window.MainWindow, set_up_window.SetUpWindow):
    kind.show_fault = lambda self, fault: self.close()
sys.exit(main(sys.argv[3:]))
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


class Desk:
    """A person's machine: documents, and what the program remembers."""

    def __init__(self, folder: Path) -> None:
        self.documents = folder / "documents"
        self.configuration = folder / "configuration"
        self.environment = {"XDG_CONFIG_HOME": str(self.configuration), "XDG_DATA_HOME": str(folder / "data")}

    @property
    def last(self) -> LastProfile:
        return LastProfile(self.configuration / "airfield-board")

    def use(self, steps: str, *arguments: str) -> list[str]:
        """Do something in each window; return which windows there were."""
        done = run_python(
            ["-c", WINDOWS_ONE_AFTER_THE_OTHER, str(self.documents), steps, *arguments], environment=self.environment
        )
        assert "Traceback" not in done.stderr
        assert done.returncode == 0
        return done.stdout.splitlines()


@pytest.fixture
def desk(tmp_path: Path) -> Desk:
    return Desk(tmp_path / "desk")


@linux_only
def test_the_first_start_sets_an_airfield_up_and_the_next_one_opens_it(desk: Desk) -> None:
    folder = desk.documents / "new"
    windows = desk.use(f"answer={folder}")
    assert [window.partition(":")[0] for window in windows] == ["set-up", "board"]
    assert "There is no airfield yet" in windows[0]
    assert windows[1] == "board: New Field live"
    assert desk.last.read() == folder / "profile.yaml"
    assert desk.use("close") == ["board: New Field live"]


@linux_only
def test_a_profile_named_at_the_start_is_the_last_one_from_then_on(desk: Desk, field: Path) -> None:
    assert desk.use("close", "--airfield", str(field)) == ["board: Cinder Mesa live"]
    assert desk.use("close") == ["board: Cinder Mesa live"]
    assert kinds(field.parent / "history.db").count("stop") == 2


@linux_only
def test_another_profile_is_opened_from_a_running_board_and_is_remembered(
    desk: Desk, field: Path, tmp_path: Path
) -> None:
    other = tmp_path / "other"
    other.mkdir()
    for name in ("fleet.yaml", "observations.csv"):
        (other / name).write_bytes((field.parent / name).read_bytes())
    text = field.read_text(encoding="utf-8").replace("Cinder Mesa", "Dry Creek")
    (other / "profile.yaml").write_text(text, encoding="utf-8")
    windows = desk.use(f"open={other / 'profile.yaml'}", "--airfield", str(field))
    assert windows == ["board: Cinder Mesa live", "board: Dry Creek live"]
    assert desk.last.read() == other / "profile.yaml"
    assert kinds(field.parent / "history.db")[-1] == "stop"
    assert kinds(other / "history.db")[-1] == "stop"


@linux_only
def test_the_set_up_leads_to_the_demo_and_nothing_is_remembered(desk: Desk) -> None:
    windows = desk.use("demo;close")
    assert [window.split()[0] for window in windows] == ["set-up:", "board:"]
    assert windows[1].endswith(" demo")
    assert desk.last.read() is None


@linux_only
def test_a_last_profile_that_cannot_be_opened_leads_to_the_set_up_with_the_reason(desk: Desk, field: Path) -> None:
    assert desk.last.remember(field.parent / "gone.yaml")
    (window,) = desk.use("close")
    assert window.startswith("set-up: The airfield that was open last cannot be opened.")
    assert "gone.yaml: there is no such file" in window
    assert desk.use(f"open={field}")[1] == "board: Cinder Mesa live"
    assert desk.last.read() == field


@linux_only
def test_a_damaged_memory_is_no_error(desk: Desk) -> None:
    (desk.configuration / "airfield-board").mkdir(parents=True)
    (desk.configuration / "airfield-board" / "last-profile.json").write_bytes(b"\xff{")
    (window,) = desk.use("close")
    assert "There is no airfield yet" in window


@linux_only
def test_without_a_display_and_a_profile_it_says_which_airfield_and_makes_nothing(desk: Desk) -> None:
    done = run_python(["-m", "airfield_board"], environment={**NO_SCREEN, **desk.environment})
    assert (done.returncode, done.stdout) == (2, "")
    assert "Say which airfield: --airfield PROFILE" in done.stderr
    assert not desk.configuration.exists()


@linux_only
def test_without_a_display_the_last_profile_does_not_open_either(desk: Desk, field: Path) -> None:
    assert desk.last.remember(field)
    done = run_python(["-m", "airfield_board"], environment={**NO_SCREEN, **desk.environment})
    assert (done.returncode, done.stdout) == (2, "")
    assert "snapshot" in done.stderr


def test_a_window_that_cannot_be_opened_after_another_leads_to_the_set_up_and_the_first_ends_the_program(
    field: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    named = AirfieldNext(profile_path=field, airfield=load_airfield(field))
    shown: list[tuple[NextWindow, bool]] = []

    def run_next(_stage: object, window: NextWindow, *, scheme: str, wall: bool) -> application._Ended:
        shown.append((window, wall))
        if isinstance(window, AirfieldNext):
            raise UserError("The history is in the way.")
        upcoming = named if window == SetUpNext() else None
        return application._Ended(code=0, upcoming=upcoming, scheme=scheme)

    monkeypatch.setattr(application, "_run_next", run_next)
    monkeypatch.setattr(application, "_stage", lambda _screen: SimpleNamespace(text_size=TextSize(tmp_path / "i", {})))
    screen = Screen(platform="offscreen")
    assert application._run_windows(screen, SetUpNext(), scheme="light", wall=True) == 0
    assert shown == [(SetUpNext(), True), (named, True), (SetUpNext(note="The history is in the way."), True)]
    with pytest.raises(UserError, match="history"):
        application._run_windows(screen, named, scheme="light", wall=False)


def test_only_the_first_board_begins_with_the_wall_view(
    field: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    named = AirfieldNext(profile_path=field, airfield=load_airfield(field))
    shown: list[tuple[NextWindow, bool]] = []

    def run_next(_stage: object, window: NextWindow, *, scheme: str, wall: bool) -> application._Ended:
        shown.append((window, wall))
        return application._Ended(code=0, upcoming=named if window == DemoNext() else None, scheme=scheme)

    monkeypatch.setattr(application, "_run_next", run_next)
    monkeypatch.setattr(application, "_stage", lambda _screen: SimpleNamespace(text_size=TextSize(tmp_path / "i", {})))
    assert application._run_windows(Screen(platform="offscreen"), DemoNext(), scheme="dark", wall=True) == 0
    assert shown == [(DemoNext(), True), (named, False)]


def test_a_board_that_was_gone_on_to_begins_anew_with_its_own_airfield(
    field: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    named = AirfieldNext(profile_path=field, airfield=load_airfield(field))
    begun: list[list[str]] = []

    def run_next(_stage: object, window: NextWindow, *, scheme: str, wall: bool) -> application._Ended:
        del wall
        last = window == upcoming
        return application._Ended(
            code=application._START_AGAIN if last else 0, upcoming=None if last else upcoming, scheme=scheme
        )

    monkeypatch.setattr(application, "_run_next", run_next)
    monkeypatch.setattr(application, "_stage", lambda _screen: SimpleNamespace(text_size=TextSize(tmp_path / "i", {})))
    monkeypatch.setattr(os, "execv", lambda _path, command: begun.append(command))
    monkeypatch.setattr(subprocess, "Popen", begun.append)
    monkeypatch.setattr(sys, "orig_argv", ["python", "-m", "airfield_board", "--airfield", "other.yaml", "--wall"])
    monkeypatch.setattr(sys, "argv", ["airfield_board", "--airfield", "other.yaml", "--wall"])
    started: tuple[NextWindow, NextWindow, list[str]]
    for started in (
        (SetUpNext(), named, ["--airfield", str(field), "--scheme", "dark"]),
        (named, DemoNext(), ["--demo", "--scheme", "dark"]),
        (named, named, ["--airfield", "other.yaml", "--wall"]),
    ):
        first, upcoming, arguments = started
        application._run_windows(Screen(platform="offscreen"), first, scheme="dark", wall=False)
        assert begun[0] == [sys.executable, "-m", "airfield_board", *arguments]
        begun.clear()


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
