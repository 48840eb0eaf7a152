"""Run the program: ``python -m airfield_board``, or ``airfield-board``."""

import sys

from airfield_board.cli import main


def run() -> None:
    """Run the command line and leave with its exit code."""
    sys.exit(main())


if __name__ == "__main__":
    run()
