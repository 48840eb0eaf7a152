"""Opens the window, or says what stands in the way; Qt is imported only once it is known to work."""

import os
import signal
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
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
from airfield_board.session.last_profile import LastProfile, configuration_folder
from airfield_board.session.recorder import Recorder
from airfield_board.training.demo import DEMO_POLL_S, DEMO_SPEED, DemoDay, running_clock, stepped_day
from airfield_board.window import formatting
from airfield_board.window.next_window import AirfieldNext, DemoNext, NextWindow, SetUpNext
from airfield_board.window.preflight import Screen, choose_screen, find_screens, no_display_message, require_libraries

if TYPE_CHECKING:
    from PySide6.QtWidgets import QApplication

    from airfield_board.window.main_window import Feed, MainWindow
    from airfield_board.window.set_up_window import SetUpWindow
    from airfield_board.window.text_size import TextSize

DONE = 0
_START_AGAIN = -1
_FOLDER_PREFIX = "airfield-board-demo-"
DEMO_PICTURE = "airfield-board-demo.png"
_DEMO_PICTURE_PX = (1440, 900)
_WHICH_AIRFIELD = (
    "Say which airfield: --airfield PROFILE opens the window on it; --demo shows an invented one.\n"
    "airfield-board --help lists the commands."
)
_INVENTED = "DEMO: an invented field, invented aircraft, an invented day. Not for use in flight."


def run_window(profile_path: Path | None, *, scheme: str = "system", wall: bool = False) -> int:
    """Open the window on an airfield, or on what a person goes on to from there, and run until it is closed.

    Parameters
    ----------
    profile_path
        The airfield's profile. None: the one that was open last; where there is none, the set-up of a first one.
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
    if profile_path is not None:
        named = AirfieldNext(profile_path=profile_path, airfield=load_airfield(profile_path))
        return _run_windows(choose_screen(find_screens(os.environ), os.environ), named, scheme=scheme, wall=wall)
    last = LastProfile(configuration_folder()).read()
    screens = find_screens(os.environ)
    if last is None and not screens:
        raise UserError(_WHICH_AIRFIELD)
    screen = choose_screen(screens, os.environ)
    return _run_windows(screen, SetUpNext() if last is None else _last_airfield(last), scheme=scheme, wall=wall)


def _last_airfield(profile_path: Path) -> NextWindow:
    """Return the airfield that was open last, or the set-up with the reason why it cannot be opened."""
    try:
        return AirfieldNext(profile_path=profile_path, airfield=load_airfield(profile_path))
    except UserError as error:
        return SetUpNext(note=f"The airfield that was open last cannot be opened.\n{error}")


def _run_windows(screen: Screen, first: NextWindow, *, scheme: str, wall: bool) -> int:
    """Show one window after the other, each as the one before it asks for, until one is closed for good."""
    stage = _stage(screen)
    upcoming, code = first, DONE
    try:
        while True:
            shown = upcoming
            try:
                ended = _run_next(stage, shown, scheme=scheme, wall=wall)
            except UserError as error:
                if shown is first:
                    raise
                # The person at the screen does not see a terminal.
                upcoming = SetUpNext(note=str(error))
                continue
            code, scheme = ended.code, ended.scheme
            wall = wall and isinstance(shown, SetUpNext)  # it is how the first board begins
            if ended.upcoming is None:
                break
            upcoming = ended.upcoming
    finally:
        stage.text_size.end()
    return _again_or(code, None if shown is first else _arguments_for(shown, scheme))


def _run_next(stage: "_Stage", window: NextWindow, *, scheme: str, wall: bool) -> "_Ended":
    if isinstance(window, AirfieldNext):
        return _run_airfield(stage, window, scheme=scheme, wall=wall)
    if isinstance(window, DemoNext):
        return _run_demo(stage, scheme=scheme, wall=wall)
    return _run_set_up(stage, window.note, scheme)


def _arguments_for(window: NextWindow, scheme: str) -> tuple[str, ...]:
    """Return the program's arguments that lead to a window which its own do not lead to."""
    if isinstance(window, AirfieldNext):
        return "--airfield", str(window.profile_path.absolute()), "--scheme", scheme
    return ("--demo", "--scheme", scheme) if isinstance(window, DemoNext) else ("--scheme", scheme)


def _run_airfield(stage: "_Stage", window: AirfieldNext, *, scheme: str, wall: bool) -> "_Ended":
    def start_feed() -> "Feed":
        from airfield_board.window.main_window import Feed
        from airfield_board.window.worker import Worker

        clock = SystemClock()

        def open_recorder() -> Recorder:
            return Recorder.open(window.profile_path, clock=clock, mode=Mode.LIVE, loaded=window.airfield)

        return Feed(clock=clock, worker=Worker(open_recorder))

    LastProfile(configuration_folder()).remember(window.profile_path)
    return _run(stage, start_feed, scheme=scheme, replayable=False, wall=wall)


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
    return _run_windows(choose_screen(screens, os.environ), DemoNext(), scheme=scheme, wall=wall)


def _run_demo(stage: "_Stage", *, scheme: str, wall: bool) -> "_Ended":
    with tempfile.TemporaryDirectory(prefix=_FOLDER_PREFIX, ignore_cleanup_errors=True) as folder:

        def start_feed() -> "Feed":
            from airfield_board.window.main_window import Feed
            from airfield_board.window.worker import Worker

            day = DemoDay(Path(tempfile.mkdtemp(dir=folder)), running_clock())
            worker = Worker(day.open_recorder, before_poll=day.feed, poll_s=DEMO_POLL_S)
            return Feed(clock=day.clock, worker=worker, speed=DEMO_SPEED)

        return _run(stage, start_feed, scheme=scheme, replayable=True, wall=wall)


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
    window: "MainWindow | SetUpWindow", kind: type[BaseException], error: BaseException, trace: TracebackType | None
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


@dataclass(frozen=True, slots=True, kw_only=True)
class _Stage:
    """What all windows of the process share."""

    application: "QApplication"
    text_size: "TextSize"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Ended:
    """How a window ended: with what exit code, and what is to be opened in its place, in which look."""

    code: int
    upcoming: NextWindow | None
    scheme: str


def _stage(screen: Screen) -> _Stage:
    """Begin with Qt, once for all windows."""
    os.environ["QT_QPA_PLATFORM"] = screen.platform  # what was found to work, and not what Qt might try instead
    from PySide6.QtWidgets import QApplication

    from airfield_board.window.row_access import install_row_access
    from airfield_board.window.text_size import TextSize

    text_size = TextSize(Path(platformdirs.user_config_dir("airfield-board")) / "window.ini", os.environ)
    text_size.begin()
    application = QApplication(sys.argv[:1])
    screen.release()
    application.setApplicationName("Airfield Board")
    application.setStyle("Fusion")
    install_row_access()
    return _Stage(application=application, text_size=text_size)


def _run(stage: _Stage, start_feed: "Callable[[], Feed]", *, scheme: str, replayable: bool, wall: bool) -> _Ended:
    from airfield_board.window.main_window import MainWindow
    from airfield_board.window.theme import SchemeChoice

    window = MainWindow(start_feed, choice=SchemeChoice(scheme), replayable=replayable, text_size=stage.text_size)
    problems: list[str] = []

    def give_up(problem: str) -> None:
        problems.append(problem)
        window.close()

    window.opening_failed.connect(give_up)
    _listen_for_the_end(window)
    window.show()
    if wall:
        window.wall.enter()  # only now: showing may fit the window to its contents, which ends the whole screen
    window.start()
    code = stage.application.exec()
    window.deleteLater()  # it must not go on following the system's look beside the next one
    if problems:
        raise UserError("\n".join(problems))
    again = window.start_again
    return _Ended(
        code=_START_AGAIN if again else code,
        upcoming=None if again else window.next_window,
        scheme=window.choice.value,
    )


def _run_set_up(stage: _Stage, note: str, scheme: str) -> _Ended:
    from airfield_board.window.set_up_window import SetUpWindow
    from airfield_board.window.theme import SchemeChoice

    documents = Path(platformdirs.user_documents_dir())
    window = SetUpWindow(SystemClock(), choice=SchemeChoice(scheme), documents=documents, note=note)
    _listen_for_the_end(window)
    window.show()
    window.start()
    code = stage.application.exec()
    window.deleteLater()
    return _Ended(code=code, upcoming=window.next_window, scheme=scheme)


def _listen_for_the_end(window: "MainWindow | SetUpWindow") -> None:
    """Close the window when the process is told to end, and let it say what nothing caught."""
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, lambda *_: window.close())  # noticed at the next tick of the window's clock
    sys.excepthook = partial(_take_fault, window)


def _again_or(code: int, arguments: Sequence[str] | None = None) -> int:
    """Put this program anew in the place of this process where the window asked for it; else return the exit code.

    Parameters
    ----------
    arguments
        The program's; None: those that it was begun with.
    """
    if code != _START_AGAIN:
        return code
    own = sys.orig_argv[1:]
    if arguments is not None:
        own = [*own[: len(own) - len(sys.argv[1:])], *arguments]
    command = [sys.executable, *own]
    if os.name != "nt":
        os.execv(command[0], command)  # noqa: S606  this very program
    subprocess.Popen(command)  # noqa: S603  likewise
    return DONE
