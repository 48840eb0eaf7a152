import ctypes
import os
import shutil
import socket
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from airfield_board.window import preflight
from airfield_board.window.preflight import (
    Missing,
    MissingLibraries,
    NoDisplay,
    Screen,
    choose_screen,
    find_screens,
    missing_from_loader,
    missing_libraries,
    missing_message,
    no_display_message,
    require_libraries,
)
from tests.interpreter import run_python


def platforms(environment: dict[str, str]) -> tuple[str, ...]:
    return tuple(screen.platform for screen in find_screens(environment))


linux_only = pytest.mark.skipif(not sys.platform.startswith("linux"), reason="Linux finds its display by sockets")


def test_nothing_is_missing_where_every_library_loads() -> None:
    assert missing_libraries("xcb", can_load=lambda _: True) == ()


def test_all_that_is_missing_is_found_and_not_only_the_first() -> None:
    gone = {"libEGL.so.1", "libxcb-cursor.so.0"}
    found = missing_libraries("xcb", can_load=lambda library: library not in gone)
    assert found == (
        Missing(library="libEGL.so.1", package="libegl1"),
        Missing(library="libxcb-cursor.so.0", package="libxcb-cursor0"),
    )


def test_painting_without_a_screen_needs_none_of_the_libraries_of_a_display() -> None:
    offscreen = {each.library for each in missing_libraries("offscreen", can_load=lambda _: False)}
    assert "libGL.so.1" in offscreen
    assert not any(library.startswith(("libxcb", "libwayland")) for library in offscreen)


def test_of_a_platform_that_is_not_known_nothing_is_looked_for() -> None:
    assert missing_libraries("cocoa", can_load=lambda _: False) == ()


def test_a_library_that_no_system_has_does_not_load() -> None:
    assert not preflight.loads("libof-no-system-at-all.so.0")


def test_the_message_names_each_package_once_in_one_command() -> None:
    message = missing_message(
        [
            Missing(library="libglib-2.0.so.0", package="libglib2.0-0"),
            Missing(library="libgthread-2.0.so.0", package="libglib2.0-0"),
            Missing(library="libEGL.so.1", package="libegl1"),
        ]
    )
    assert "sudo apt-get install -y libglib2.0-0 libegl1" in message
    assert "libgthread-2.0.so.0" in message
    assert "no package is named" not in message


def test_a_library_whose_package_is_not_known_is_named_all_the_same() -> None:
    message = missing_message(
        [Missing(library="libnew.so.9", package=""), Missing(library="libGL.so.1", package="libgl1")]
    )
    assert "libnew.so.9" in message
    assert "apt-get install -y libgl1" in message
    assert "no package is named" in message


@pytest.mark.parametrize(
    ("said", "library", "package"),
    [
        ("libEGL.so.1: cannot open shared object file: No such file or directory", "libEGL.so.1", "libegl1"),
        ("libnew.so.9: cannot open shared object file: No such file or directory", "libnew.so.9", ""),
        ("No module named 'PySide6'", "No module named 'PySide6'", ""),
    ],
)
def test_the_loaders_message_is_read_for_the_library_it_names(said: str, library: str, package: str) -> None:
    assert missing_from_loader(said) == Missing(library=library, package=package)


def test_a_missing_library_is_an_error_that_names_its_package(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(preflight, "missing_libraries", lambda _: (Missing(library="libGL.so.1", package="libgl1"),))
    with pytest.raises(MissingLibraries, match="apt-get install -y libgl1"):
        require_libraries("offscreen")


@linux_only
def test_a_plugin_whose_library_is_missing_is_named_instead_of_ending_the_process(tmp_path: Path) -> None:
    folder = tmp_path / "Qt" / "plugins" / "platforms"
    folder.mkdir(parents=True)
    (folder / "libqxcb.so").write_text("no library")
    with pytest.raises(MissingLibraries, match="libqxcb"):
        preflight._load_plugin(tmp_path, "xcb")


def test_without_a_plugin_file_there_is_nothing_to_load(tmp_path: Path) -> None:
    preflight._load_plugin(tmp_path, "xcb")
    assert list(tmp_path.iterdir()) == []


def test_painting_off_screen_works_here() -> None:
    require_libraries("offscreen")
    assert missing_libraries("offscreen") == ()


def test_qt_that_cannot_be_imported_is_told_like_a_missing_library() -> None:
    code = (
        "import sys\n"
        "class Blocked:\n"
        "    def find_spec(self, name, path=None, target=None):\n"
        "        if name.startswith('PySide6'):\n"
        "            raise ImportError('libEGL.so.1: cannot open shared object file: No such file or directory')\n"
        "sys.meta_path.insert(0, Blocked())\n"
        "from airfield_board.window.preflight import MissingLibraries, require_libraries\n"
        "try:\n"
        "    require_libraries('offscreen')\n"
        "except MissingLibraries as error:\n"
        "    print(error)\n"
    )
    done = run_python(["-c", code])
    assert "libegl1" in done.stdout


def test_preflight_itself_imports_no_qt() -> None:
    code = "import sys, airfield_board.window.preflight; print([name for name in sys.modules if 'PySide6' in name])"
    done = run_python(["-c", code])
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize("platform", ["offscreen", "minimal", "minimalegl", "offscreen:size=10x10"])
def test_a_platform_without_a_screen_is_no_display(platform: str) -> None:
    assert platforms({"QT_QPA_PLATFORM": platform, "DISPLAY": ":0", "WAYLAND_DISPLAY": "wayland-0"}) == ()


@linux_only
def test_without_display_variables_there_is_no_display() -> None:
    assert platforms({}) == ()
    with pytest.raises(NoDisplay, match="no display"):
        choose_screen((), {})


@linux_only
@pytest.mark.parametrize("display", [":7931", "localhost:7931", "nonsense", ":", ":x", ":99999", "unix:7931.0"])
def test_a_display_that_cannot_be_reached_is_no_display(display: str) -> None:
    assert platforms({"DISPLAY": display}) == ()


@linux_only
def test_a_distant_server_that_does_not_answer_in_time_is_no_display(monkeypatch: pytest.MonkeyPatch) -> None:
    answer = threading.Event()
    monkeypatch.setattr(preflight, "_CONNECT_S", 0.0)
    monkeypatch.setattr(preflight, "_x11_entry", lambda _: answer.wait())
    assert platforms({"DISPLAY": "far:0"}) == ()
    answer.set()


@linux_only
def test_without_the_library_to_ask_an_x_server_the_missing_library_is_what_is_told(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def missing(library: str) -> None:
        raise OSError(f"{library}: cannot open shared object file")

    monkeypatch.setattr(ctypes, "CDLL", missing)
    assert platforms({"DISPLAY": ":0"}) == ("xcb",)
    with pytest.raises(MissingLibraries, match="libxcb1"):
        choose_screen(find_screens({"DISPLAY": ":0"}), {})


@linux_only
def test_a_wayland_socket_that_answers_is_a_display(tmp_path: Path) -> None:
    with socket.socket(socket.AF_UNIX) as server:
        server.bind(str(tmp_path / "wayland-9"))
        server.listen()
        assert platforms({"XDG_RUNTIME_DIR": str(tmp_path), "WAYLAND_DISPLAY": "wayland-9"}) == ("wayland",)
    assert platforms({"XDG_RUNTIME_DIR": str(tmp_path), "WAYLAND_DISPLAY": "wayland-9"}) == ()


@linux_only
def test_an_x_server_that_lets_us_in_is_a_display(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(preflight, "_x11_entry", lambda _: lambda: None)
    assert platforms({"DISPLAY": ":5"}) == ("xcb",)
    assert platforms({"DISPLAY": "far:5.0", "QT_QPA_PLATFORM": "xcb"}) == ("xcb",)
    assert platforms({"DISPLAY": ":5", "QT_QPA_PLATFORM": "wayland"}) == ()


@linux_only
def test_a_platform_asked_for_by_name_is_trusted() -> None:
    assert platforms({"QT_QPA_PLATFORM": "vnc:size=800x600"}) == ("vnc",)


@pytest.mark.parametrize(("system", "platform"), [("darwin", "cocoa"), ("win32", "windows")])
def test_other_systems_have_their_own_platform(monkeypatch: pytest.MonkeyPatch, system: str, platform: str) -> None:
    monkeypatch.setattr(sys, "platform", system)
    assert platforms({}) == (platform,)


def test_the_message_names_the_display_and_the_commands_that_need_none() -> None:
    message = no_display_message({"DISPLAY": ":7"})
    assert ":7" in message
    for command in ("assess", "compute", "replay", "check", "snapshot", "verify", "schema", "--demo"):
        assert command in message


@linux_only
def test_a_screen_that_is_there_still_needs_its_libraries(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(preflight, "missing_libraries", lambda _: (Missing(library="libxcb.so.1", package="libxcb1"),))
    with pytest.raises(MissingLibraries, match="libxcb1"):
        choose_screen((Screen(platform="xcb"),), {})


@linux_only
def test_where_one_display_misses_a_library_another_that_has_all_is_taken(monkeypatch: pytest.MonkeyPatch) -> None:
    lacking = (Missing(library="libwayland-cursor.so.0", package="libwayland-cursor0"),)
    monkeypatch.setattr(preflight, "missing_libraries", lambda platform: lacking if platform == "wayland" else ())
    monkeypatch.setattr(preflight, "_load_plugin", lambda *_: None)
    x11 = Screen(platform="xcb")
    assert choose_screen((Screen(platform="wayland"), x11), {}) is x11


@pytest.mark.skipif(shutil.which("Xvfb") is None, reason="needs the X server that paints into memory")
def test_a_server_that_starts_anew_with_its_last_client_is_still_there_for_qt() -> None:
    reader, writer = os.pipe()
    with subprocess.Popen(  # noqa: S603  a program of the system with arguments of our own
        [str(shutil.which("Xvfb")), "-displayfd", str(writer), "-nolisten", "tcp"],
        pass_fds=(writer,),
        stderr=subprocess.DEVNULL,
    ) as server:
        os.close(writer)
        with os.fdopen(reader) as said:
            display = f":{said.readline().strip()}"
        code = (
            "import os\n"
            "from airfield_board.window.preflight import choose_screen, find_screens\n"
            "screen = choose_screen(find_screens(os.environ), os.environ)\n"
            "from PySide6.QtWidgets import QApplication\n"
            "application = QApplication([])\n"
            "screen.release()\n"
            "print(application.platformName())\n"
        )
        done = run_python(
            ["-c", code], environment={"DISPLAY": display, "WAYLAND_DISPLAY": None, "QT_QPA_PLATFORM": None}
        )
        server.terminate()
    assert done.stdout == "xcb\n"
    assert done.returncode == 0
