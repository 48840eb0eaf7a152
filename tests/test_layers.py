import pkgutil
from pathlib import Path

import airfield_board
from tests.interpreter import run_python

ABOVE_THE_DOMAIN = ("airfield_board.window", "airfield_board.cli", "airfield_board.__main__")

IMPORT_WITH_QT_BLOCKED = """
import importlib, sys

class Blocked:
    def find_spec(self, name, path=None, target=None):
        if name.split(".")[0] in {"PySide6", "shiboken6", "pyqtgraph"}:
            raise ImportError(f"{name} is not to be imported here")

sys.meta_path.insert(0, Blocked())
for name in sys.argv[1:]:
    importlib.import_module(name)
print(len(sys.argv) - 1)
"""


def modules() -> list[str]:
    found = pkgutil.walk_packages([str(Path(airfield_board.__file__).parent)], "airfield_board.", onerror=_fail)
    return [module.name for module in found]


def _fail(name: str) -> None:
    raise AssertionError(f"{name} cannot be imported")


def test_everything_below_the_window_imports_where_there_is_no_qt() -> None:
    names = [name for name in modules() if not name.startswith(ABOVE_THE_DOMAIN)]
    rooms = {name.split(".")[1] for name in names}
    assert {"atmosphere", "observations", "configuration", "limits", "history", "session", "training"} <= rooms
    done = run_python(["-c", IMPORT_WITH_QT_BLOCKED, *names])
    assert done.stderr == ""
    assert done.stdout.strip() == str(len(names))


def test_the_commands_and_what_looks_for_qt_import_where_there_is_no_qt() -> None:
    names = ["airfield_board.cli", "airfield_board.window.preflight", "airfield_board.window.application"]
    done = run_python(["-c", IMPORT_WITH_QT_BLOCKED, *names])
    assert done.stderr == ""
    assert done.stdout.strip() == "3"


def test_the_block_on_qt_does_block() -> None:
    done = run_python(["-c", IMPORT_WITH_QT_BLOCKED, "airfield_board.window.worker"])
    assert "PySide6" in done.stderr
    assert done.returncode == 1
