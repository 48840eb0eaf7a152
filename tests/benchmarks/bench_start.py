"""From starting the program to its first painted board, against an empty window of PySide6 and pyqtgraph.

Both are whole processes, started in turn, offscreen.
"""

import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from tests.benchmarks.invented import write_field, write_record

REPEATS = 7
GOAL = 1.4

_EMPTY = """
import pyqtgraph
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QMainWindow
application = QApplication([])
class Window(QMainWindow):
    def paintEvent(self, event):
        super().paintEvent(event)
        QTimer.singleShot(0, application.quit)
window = Window()
window.setCentralWidget(pyqtgraph.PlotWidget())
window.resize(1440, 900)
window.show()
application.exec()
"""

_BOARD = """
import sys
from pathlib import Path
from airfield_board.window import application
application.run_window(Path(sys.argv[1]), quit_after_first_board=True)
"""


def _seconds(code: str, *arguments: str) -> float:
    environment = {**os.environ, "QT_QPA_PLATFORM": "offscreen"}
    began = time.perf_counter()
    subprocess.run([sys.executable, "-c", code, *arguments], check=True, env=environment)  # noqa: S603
    return time.perf_counter() - began


def main() -> int:
    """Print the medians and the ratio; return 0 where the goal is met, else 1."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        profile = write_field(folder)
        write_record(folder / "observations.csv", 1440)
        _seconds(_EMPTY)
        _seconds(_BOARD, str(profile))
        empty_s, board_s = [], []
        for _ in range(REPEATS):
            empty_s.append(_seconds(_EMPTY))
            board_s.append(_seconds(_BOARD, str(profile)))
    empty, board = statistics.median(empty_s), statistics.median(board_s)
    print(f"empty window            {empty:6.2f} s")
    print(f"start to first board    {board:6.2f} s{board / empty:8.2f} x")
    print(f"goal, at most {GOAL:g} x: {'met' if board <= GOAL * empty else 'not met'}")
    return 0 if board <= GOAL * empty else 1


if __name__ == "__main__":
    raise SystemExit(main())
