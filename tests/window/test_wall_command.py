"""``--wall`` opens the window with the wall view, on an airfield and in the demo."""

from pathlib import Path

import pytest

from airfield_board.cli import _parser
from airfield_board.resources import bundled_folder
from tests.interpreter import run_python

WINDOW_THAT_TELLS = """
import sys
from airfield_board.cli import main
from airfield_board.window import application, main_window, preflight

application.find_screens = lambda _: (preflight.Screen(platform="offscreen"),)
begin = main_window.MainWindow.start

def start(self):
    begin(self)
    def tell(_):
        shown = "wall" if self.wall.view.isVisible() else "pages" if self.view.isVisible() else "nothing"
        print(shown, "on the whole screen" if self.isFullScreen() else "in a window", self.wall.setup.diagonal_in)
        self.close()
    self.worker.state_came.connect(tell)

main_window.MainWindow.start = start
sys.exit(main(sys.argv[1:]))
"""


@pytest.mark.parametrize(
    ("options", "expected"), [(["--wall"], "wall on the whole screen 43.0"), ([], "pages in a window 43.0")]
)
@pytest.mark.parametrize("source", ["airfield", "demo"])
def test_the_window_opens_as_asked(tmp_path: Path, source: str, options: list[str], expected: str) -> None:
    for name in ("profile.yaml", "fleet.yaml", "observations.csv"):
        (tmp_path / name).write_bytes((bundled_folder("demo_data") / name).read_bytes())
    where = ["--demo"] if source == "demo" else ["--airfield", str(tmp_path / "profile.yaml")]
    home = {"HOME": str(tmp_path), "XDG_CONFIG_HOME": str(tmp_path / "config")}
    done = run_python(["-c", WINDOW_THAT_TELLS, *where, *options], environment=home)
    assert "Traceback" not in done.stderr
    assert done.stdout == f"{expected}\n"
    assert done.returncode == 0


def test_the_wall_is_no_page_of_a_picture() -> None:
    with pytest.raises(SystemExit):
        _parser().parse_args(["snapshot", "--airfield", "profile.yaml", "--out", "wall.png", "--page", "wall"])
