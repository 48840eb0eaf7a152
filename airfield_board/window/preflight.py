"""What is looked for before Qt is touched: its system libraries, and a display that it can open.

Qt ends the process where either is missing, with a message that names the first missing library only. So both are
looked for first, without importing Qt, and what is missing is said all at once.
"""

import ctypes
import os
import queue
import re
import socket
import sys
import threading
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from airfield_board.errors import UserError

COMMANDS_WITHOUT_SCREEN = ("assess", "compute", "replay", "check", "snapshot", "verify", "schema")
"""Commands that need no display."""

_PLATFORMS_WITHOUT_SCREEN = frozenset({"offscreen", "minimal", "minimalegl"})
_CONNECT_S = 5.0
_X11_DISPLAY = re.compile(r"[^\0]*:[0-9]{1,5}(\.[0-9]{1,3})?")

# Library and Debian/Ubuntu package, from the plugins' own lists of needed libraries (readelf) and Debian 12's
# package index.
_EVERYWHERE = (
    ("libglib-2.0.so.0", "libglib2.0-0"),
    ("libgthread-2.0.so.0", "libglib2.0-0"),
    ("libGL.so.1", "libgl1"),
    ("libEGL.so.1", "libegl1"),
    ("libxkbcommon.so.0", "libxkbcommon0"),
    ("libfontconfig.so.1", "libfontconfig1"),
    ("libfreetype.so.6", "libfreetype6"),
    ("libdbus-1.so.3", "libdbus-1-3"),
    ("libX11.so.6", "libx11-6"),
    ("libz.so.1", "zlib1g"),
)
_XCB = (
    ("libxcb.so.1", "libxcb1"),
    ("libX11-xcb.so.1", "libx11-xcb1"),
    ("libxcb-cursor.so.0", "libxcb-cursor0"),
    ("libxcb-icccm.so.4", "libxcb-icccm4"),
    ("libxcb-image.so.0", "libxcb-image0"),
    ("libxcb-keysyms.so.1", "libxcb-keysyms1"),
    ("libxcb-randr.so.0", "libxcb-randr0"),
    ("libxcb-render.so.0", "libxcb-render0"),
    ("libxcb-render-util.so.0", "libxcb-render-util0"),
    ("libxcb-shape.so.0", "libxcb-shape0"),
    ("libxcb-shm.so.0", "libxcb-shm0"),
    ("libxcb-sync.so.1", "libxcb-sync1"),
    ("libxcb-util.so.1", "libxcb-util1"),
    ("libxcb-xfixes.so.0", "libxcb-xfixes0"),
    ("libxcb-xkb.so.1", "libxcb-xkb1"),
    ("libxkbcommon-x11.so.0", "libxkbcommon-x11-0"),
)
_WAYLAND = (
    ("libwayland-client.so.0", "libwayland-client0"),
    ("libwayland-cursor.so.0", "libwayland-cursor0"),
)
_PACKAGE_OF = dict(_EVERYWHERE + _XCB + _WAYLAND)


class MissingLibraries(UserError):
    """Qt's system libraries are not all here; the message names every package to install."""


class NoDisplay(UserError):
    """There is no display to open a window on."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Missing:
    """A system library that Qt needs and that could not be loaded.

    Attributes
    ----------
    library
        Name of the shared library, or what the loader said where the name is not known.
    package
        Of Debian and Ubuntu; empty where not known.
    """

    library: str
    package: str


def loads(library: str) -> bool:
    """Whether the system's loader finds and loads a shared library."""
    try:
        ctypes.CDLL(library)
    except OSError:
        return False
    return True


def missing_libraries(platform: str, can_load: Callable[[str], bool] = loads) -> tuple[Missing, ...]:
    """Return which system libraries Qt would miss.

    Parameters
    ----------
    platform
        Qt's name of it: ``xcb``, ``wayland`` or ``offscreen``; of another (and outside Linux) nothing is looked for.
    can_load
        Tells whether a library can be loaded.

    Returns
    -------
    tuple of Missing
        In the order in which Qt needs them; empty where nothing is missing.
    """
    needed = {
        "offscreen": _EVERYWHERE,
        "xcb": _EVERYWHERE + _XCB,
        "wayland": _EVERYWHERE + _WAYLAND,
    }.get(platform, ())
    return tuple(Missing(library=library, package=package) for library, package in needed if not can_load(library))


def missing_message(missing: Iterable[Missing]) -> str:
    """Say in plain words what is missing and how to install all of it at once."""
    found = tuple(missing)
    packages = tuple(dict.fromkeys(each.package for each in found if each.package))
    lines = ["The window and its pictures need system libraries that are missing here:"]
    lines += [f"  {each.library}" + (f"  (package {each.package})" if each.package else "") for each in found]
    if packages:
        lines += ["On Debian or Ubuntu install them with:", f"  sudo apt-get install -y {' '.join(packages)}"]
    if len(packages) < len({each.package for each in found}):
        lines.append("Where no package is named, look for the one of your system that brings the library.")
    return "\n".join(lines)


@dataclass(frozen=True, slots=True, kw_only=True)
class Screen:
    """A display that lets us in.

    Attributes
    ----------
    platform
        Qt's name of what opens a window on it.
    release
        Ends our own connection to it. It must stay until Qt has one: a server that has lost its last client starts
        anew, and Qt would find it closed.
    """

    platform: str
    release: Callable[[], object] = lambda: None


def find_screens(environment: Mapping[str, str]) -> tuple[Screen, ...]:
    """Return the displays on which a window can be opened.

    Parameters
    ----------
    environment
        The process's environment: ``QT_QPA_PLATFORM``, ``WAYLAND_DISPLAY``, ``XDG_RUNTIME_DIR``, ``DISPLAY``.

    Returns
    -------
    tuple of Screen
        The best first; empty where there is no display, or none that lets us in.
    """
    wanted = environment.get("QT_QPA_PLATFORM", "").split(";")[0].split(":")[0]
    if wanted in _PLATFORMS_WITHOUT_SCREEN:
        return ()
    if not sys.platform.startswith("linux"):
        return (Screen(platform=wanted or {"darwin": "cocoa", "win32": "windows"}.get(sys.platform, "xcb")),)
    if wanted not in {"", "xcb", "wayland"}:
        # Asked for by name (a frame buffer, VNC): the user knows this screen better than we do.
        return (Screen(platform=wanted),)
    found = []
    if wanted != "xcb" and _wayland_answers(environment):
        found.append(Screen(platform="wayland"))
    if wanted != "wayland":
        release = _x11_connection(environment.get("DISPLAY", ""))
        if release is not None:
            found.append(Screen(platform="xcb", release=release))
    return tuple(found)


def choose_screen(screens: Sequence[Screen], environment: Mapping[str, str]) -> Screen:
    """Return the display to open the window on, or say what stands in the way.

    Raises
    ------
    NoDisplay
        Where there is none; names the commands that need none.
    MissingLibraries
        Where Qt would miss a system library on every display there is; names those of the best one.
    """
    if not screens:
        raise NoDisplay(no_display_message(environment))
    chosen = next((each for each in screens if not missing_libraries(each.platform)), screens[0])
    require_libraries(chosen.platform)
    return chosen


def require_libraries(platform: str) -> None:
    """Look for what Qt needs on a platform, its own plugin included.

    Raises
    ------
    MissingLibraries
        Where something cannot be loaded; names every package to install.
    """
    missing = missing_libraries(platform)
    if missing:
        raise MissingLibraries(missing_message(missing))
    try:
        import PySide6.QtWidgets
    except ImportError as error:
        raise MissingLibraries(missing_message([missing_from_loader(str(error))])) from error
    _load_plugin(Path(PySide6.__file__).parent, platform)


def missing_from_loader(message: str) -> Missing:
    """Read which library the loader's message is about: ``libEGL.so.1: cannot open shared object file ...``."""
    library = message.split(":", maxsplit=1)[0].strip()
    if ".so" not in library:
        return Missing(library=message, package="")
    return Missing(library=library, package=_PACKAGE_OF.get(library, ""))


def no_display_message(environment: Mapping[str, str]) -> str:
    """Say that there is no display, and what can be done without one."""
    shown = environment.get("WAYLAND_DISPLAY") or environment.get("DISPLAY")
    why = f"The display {shown} cannot be opened." if shown else "There is no display to open the window on."
    commands = ", ".join(COMMANDS_WITHOUT_SCREEN)
    return (
        f"{why}\n"
        f"These commands need no screen: {commands}.\n"
        "airfield-board snapshot paints the board to a picture; airfield-board --demo plays the demo in the terminal."
    )


def _load_plugin(package: Path, platform: str) -> None:
    """Load Qt's plugin of a platform as Qt will, so that a library not on our lists is named instead of fatal."""
    plugin = package / "Qt" / "plugins" / "platforms" / f"libq{platform}.so"
    if not plugin.is_file():
        return
    try:
        ctypes.CDLL(str(plugin))
    except OSError as error:
        raise MissingLibraries(missing_message([missing_from_loader(str(error))])) from error


def _wayland_answers(environment: Mapping[str, str]) -> bool:
    display = environment.get("WAYLAND_DISPLAY", "")
    if not display:
        return False
    path = Path(environment.get("XDG_RUNTIME_DIR", "/")) / display  # an absolute display replaces the folder
    try:
        with socket.socket(socket.AF_UNIX, socket.SOCK_STREAM) as connection:
            connection.settimeout(_CONNECT_S)
            connection.connect(str(path))
    except OSError:
        return False
    return True


def _x11_connection(display: str) -> Callable[[], object] | None:
    """Connect to an X server; return what ends the connection, None where it is not there or does not let us in.

    Done on a thread, which is left behind where a distant server does not answer in time. No socket is tried first:
    a server takes that for its last client leaving, and starts anew.
    """
    if not _X11_DISPLAY.fullmatch(display):
        return None
    entered: queue.SimpleQueue[Callable[[], object] | None] = queue.SimpleQueue()
    threading.Thread(target=lambda: entered.put(_x11_entry(display)), daemon=True).start()
    try:
        return entered.get(timeout=_CONNECT_S)
    except queue.Empty:
        return None


def _x11_entry(display: str) -> Callable[[], object] | None:
    try:
        xcb = ctypes.CDLL("libxcb.so.1")
    except OSError:
        return lambda: None  # said by name when the libraries are looked for
    xcb.xcb_connect.restype = ctypes.c_void_p
    xcb.xcb_connect.argtypes = [ctypes.c_char_p, ctypes.c_void_p]
    xcb.xcb_connection_has_error.argtypes = [ctypes.c_void_p]
    xcb.xcb_disconnect.argtypes = [ctypes.c_void_p]
    connection = xcb.xcb_connect(os.fsencode(display), None)
    release = partial(xcb.xcb_disconnect, connection)
    if xcb.xcb_connection_has_error(connection) != 0:
        release()
        return None
    return release
