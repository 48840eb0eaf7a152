"""Opens the window, or says what stands in the way; Qt is imported only once it is known to work."""

import os
import signal
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterable
from functools import partial
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, TextIO
from zoneinfo import ZoneInfo

import platformdirs

from airfield_board import ADVISES
from airfield_board.clock import SystemClock
from airfield_board.configuration.profile import load_airfield
from airfield_board.errors import UserError
from airfield_board.session.board_state import BoardState, Mode, StatusChange
from airfield_board.session.recorder import Recorder
from airfield_board.training.demo import DEMO_POLL_S, DEMO_SPEED, DemoDay, running_clock, stepped_day
from airfield_board.window import formatting
from airfield_board.window.preflight import Screen, choose_screen, find_screens, no_display_message, require_libraries

if TYPE_CHECKING:
    from airfield_board.window.main_window import Feed, MainWindow

DONE = 0
_START_AGAIN = -1
_FOLDER_PREFIX = "airfield-board-demo-"
DEMO_PICTURE = "airfield-board-demo.png"
_DEMO_PICTURE_PX = (1440, 900)
_INVENTED = "DEMO: an invented field, invented aircraft, an invented day. Not for use in flight."


def run_window(profile_path: Path, *, scheme: str = "system", wall: bool = False) -> int:
    """Open the window on an airfield and run until it is closed.

    Parameters
    ----------
    profile_path
        The airfield's profile.
    scheme
        ``light``, ``dark`` or ``system``.
    wall
        Whether it opens with the wall view.

    Returns
    -------
    int
        The exit code.

    Raises
    ------
    UserError
        Where the files are wrong, a system library is missing, or there is no display.
    """
    airfield = load_airfield(profile_path)
    screen = choose_screen(find_screens(os.environ), os.environ)

    def start_feed() -> "Feed":
        from airfield_board.window.main_window import Feed
        from airfield_board.window.worker import Worker

        clock = SystemClock()
        return Feed(
            clock=clock,
            worker=Worker(lambda: Recorder.open(profile_path, clock=clock, mode=Mode.LIVE, loaded=airfield)),
        )

    return _again_or(_run(screen, start_feed, scheme=scheme, replayable=False, wall=wall))


def run_demo(*, scheme: str = "system", wall: bool = False, out: TextIO | None = None) -> int:
    """Play the demo: in the window, or without a display in the terminal.

    Parameters
    ----------
    scheme
        ``light``, ``dark`` or ``system``.
    wall
        Whether the window opens with the wall view.
    out
        Where the terminal's lines go; None: standard output.

    Returns
    -------
    int
        The exit code.

    Raises
    ------
    UserError
        Where a system library is missing.
    """
    screens = find_screens(os.environ)
    if not screens:
        return play_demo_in_terminal(out or sys.stdout, Path.cwd(), scheme=scheme)
    screen = choose_screen(screens, os.environ)
    with tempfile.TemporaryDirectory(prefix=_FOLDER_PREFIX, ignore_cleanup_errors=True) as folder:

        def start_feed() -> "Feed":
            from airfield_board.window.main_window import Feed
            from airfield_board.window.worker import Worker

            day = DemoDay(Path(tempfile.mkdtemp(dir=folder)), running_clock())
            worker = Worker(day.open_recorder, before_poll=day.feed, poll_s=DEMO_POLL_S)
            return Feed(clock=day.clock, worker=worker, speed=DEMO_SPEED)

        code = _run(screen, start_feed, scheme=scheme, replayable=True, wall=wall)
    return _again_or(code)


def play_demo_in_terminal(out: TextIO, folder: Path, *, scheme: str = "light") -> int:
    """Play the demo's day through the recorder, print its state changes, and paint the board.

    Parameters
    ----------
    out
        Where the lines go.
    folder
        Where the picture is put; where it cannot be written, in the folder for temporary files.

    Returns
    -------
    int
        The exit code.

    Raises
    ------
    UserError
        Where a system library that painting needs is missing.
    """
    require_libraries("offscreen")
    why = no_display_message(os.environ).splitlines()[0]
    out.write(f"{why} The demo plays here.\n{_INVENTED}\n\n")
    with tempfile.TemporaryDirectory(prefix=_FOLDER_PREFIX, ignore_cleanup_errors=True) as playing:
        state = write_changes(stepped_day(Path(playing)), out)
    picture = _paint(state, folder, scheme)
    out.write(f"\nThe day is over. The board as it stands: {picture}\n{formatting.CAUTION}\n{ADVISES}\n")
    return DONE


def write_changes(boards: Iterable[BoardState], out: TextIO) -> BoardState:
    """Write each status change as it comes, and return the last board.

    Parameters
    ----------
    boards
        In order of time; at least one.
    out
        Where the lines go.
    """
    seen: set[int] = set()
    last: BoardState | None = None
    for last in boards:
        zone = ZoneInfo(last.airfield.time_zone)
        for change in reversed(last.changes):
            if change.number not in seen:
                seen.add(change.number)
                when, word = formatting.clock(change.time, zone), formatting.STATE_WORDS[change.state]
                out.write(f"{when}  {word:<10}  {change.label:<42}  {_height(last, change)}".rstrip() + "\n")
                out.flush()
    if last is None:
        raise ValueError("no board was played")
    return last


def _take_fault(
    window: "MainWindow", kind: type[BaseException], error: BaseException, trace: TracebackType | None
) -> None:
    """Report what nothing caught on the window's thread, and take away a board that may no longer be kept up."""
    sys.__excepthook__(kind, error, trace)
    window.show_fault(f"{kind.__name__}: {error}")


def _height(state: BoardState, change: StatusChange) -> str:
    """Say at what density altitude it changed, where the board is that of the change."""
    if state.conditions is None or state.observation is None or state.observation.time != change.time:
        return ""
    return f"density altitude {formatting.altitude(state.conditions.density_altitude_ft)} ft"


def _paint(state: BoardState, folder: Path, scheme: str) -> Path:
    os.environ["QT_QPA_PLATFORM"] = "offscreen"
    from airfield_board.window.board_view import PageName
    from airfield_board.window.picture import offscreen_application, save_page

    application = offscreen_application()
    look = "dark" if scheme == "dark" else "light"
    refusal = ""
    for place in (folder, Path(tempfile.gettempdir())):
        picture = place / DEMO_PICTURE
        try:
            save_page(picture, state, state.assessed_at, page=PageName.BOARD, size_px=_DEMO_PICTURE_PX, scheme=look)
        except OSError as error:
            refusal = str(error)
            continue
        application.processEvents()
        return picture
    raise UserError(refusal)


def _run(screen: Screen, start_feed: "Callable[[], Feed]", *, scheme: str, replayable: bool, wall: bool) -> int:
    os.environ["QT_QPA_PLATFORM"] = screen.platform  # what was found to work, and not what Qt might try instead
    from PySide6.QtWidgets import QApplication

    from airfield_board.window.main_window import MainWindow
    from airfield_board.window.row_access import install_row_access
    from airfield_board.window.text_size import TextSize
    from airfield_board.window.theme import SchemeChoice

    text_size = TextSize(Path(platformdirs.user_config_dir("airfield-board")) / "window.ini", os.environ)
    text_size.begin()
    application = QApplication(sys.argv[:1])
    screen.release()
    application.setApplicationName("Airfield Board")
    application.setStyle("Fusion")
    install_row_access()
    window = MainWindow(start_feed, choice=SchemeChoice(scheme), replayable=replayable, text_size=text_size)
    problems: list[str] = []

    def give_up(problem: str) -> None:
        problems.append(problem)
        window.close()

    window.opening_failed.connect(give_up)
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, lambda *_: window.close())  # noticed at the next tick of the window's clock
    sys.excepthook = partial(_take_fault, window)
    window.show()
    if wall:
        window.wall.enter()  # only now: showing may fit the window to its contents, which ends the whole screen
    window.start()
    code = application.exec()
    text_size.end()
    if problems:
        raise UserError("\n".join(problems))
    return _START_AGAIN if window.start_again else code


def _again_or(code: int) -> int:
    """Put this program anew in the place of this process where the window asked for it; else return the exit code."""
    if code == _START_AGAIN:
        command = [sys.executable, *sys.orig_argv[1:]]
        if os.name != "nt":
            os.execv(command[0], command)  # noqa: S606  this very program, with its own arguments
        subprocess.Popen(command)  # noqa: S603  likewise
        return DONE
    return code
