"""From starting the program to its first painted board, against an empty window of PySide6 and pyqtgraph.

Both are processes of their own, started in turn, on a virtual display; each tells when it has painted.
"""

import os
import shutil
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from tests.benchmarks.invented import write_field, write_record

REPEATS = 7
GOAL = 1.4

_EMPTY = """
import time
import pyqtgraph
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QMainWindow
application = QApplication([])
class Plot(pyqtgraph.PlotWidget):
    def paintEvent(self, event):
        super().paintEvent(event)
        print(time.time(), flush=True)
        QTimer.singleShot(0, application.quit)
window = QMainWindow()
window.setCentralWidget(Plot())
window.resize(1440, 900)
window.show()
application.exec()
"""

_BOARD = """
import sys
import time
from pathlib import Path
from airfield_board.window import application, main_window

start = main_window.MainWindow.start

def start_and_end(self):
    from PySide6.QtWidgets import QApplication
    start(self)
    def painted(state):
        self.repaint()  # strip and rows with their states; the day's plot follows as soon as pyqtgraph is there
        print(time.time(), flush=True)
        QApplication.quit()
    self.worker.state_came.connect(painted)

main_window.MainWindow.start = start_and_end
sys.exit(application.run_window(Path(sys.argv[1])))
"""


def _seconds(display: str, code: str, *arguments: str) -> float:
    environment = {**os.environ, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb"}
    began = time.time()
    told = subprocess.run(  # noqa: S603
        [sys.executable, "-c", code, *arguments],
        check=True,
        env=environment,
        timeout=60,
        capture_output=True,
        text=True,
    )
    return float(told.stdout.split()[0]) - began


@contextmanager
def virtual_display() -> Iterator[str]:
    """Yield a display: a virtual one of its own, so that both programs are shown alike."""
    server = shutil.which("Xvfb")
    if server is None:
        raise SystemExit("this benchmark needs Xvfb (package xvfb)")
    read, write = os.pipe()
    running = subprocess.Popen(  # noqa: S603
        [server, "-displayfd", str(write), "-screen", "0", "1680x1050x24"],
        pass_fds=[write],
        stderr=subprocess.DEVNULL,
    )
    os.close(write)
    try:
        with os.fdopen(read) as told:
            yield f":{told.readline().strip()}"
    finally:
        running.terminate()
        running.wait()


def main() -> int:
    """Print the medians and the ratio; return 0 where the goal is met, else 1."""
    with tempfile.TemporaryDirectory() as name, virtual_display() as display:
        folder = Path(name)
        os.environ["XDG_CONFIG_HOME"] = name  # it is not to remember this profile for the person who measures
        profile = write_field(folder)
        write_record(folder / "observations.csv", 1440)
        _seconds(display, _EMPTY)
        _seconds(display, _BOARD, str(profile))
        empty_s, board_s = [], []
        for _ in range(REPEATS):
            empty_s.append(_seconds(display, _EMPTY))
            board_s.append(_seconds(display, _BOARD, str(profile)))
    empty, board = statistics.median(empty_s), statistics.median(board_s)
    print(f"empty window            {empty:6.2f} s")
    print(f"start to first board    {board:6.2f} s{board / empty:8.2f} x")
    print(f"goal, at most {GOAL:g} x: {'met' if board <= GOAL * empty else 'not met'}")
    return 0 if board <= GOAL * empty else 1


if __name__ == "__main__":
    raise SystemExit(main())
