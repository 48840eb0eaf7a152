"""A recorder in a program of its own, for tests that end it without warning or take its disk away.

``python -m tests.history.writer endless PATH`` records without end and prints the number of records after each commit.
``python -m tests.history.writer full PATH`` records until its files may not grow, then with room again.
"""

import sys
from pathlib import Path

from airfield_board.history.errors import NotRecorded
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from tests.history.examples import START, observation, record


def _tell(text: str) -> None:
    print(text, flush=True)


def endless(path: Path) -> None:
    history = History.open(path, now=START, program_version="0.1.0", busy_s=0.0)
    _tell(f"{history.count}")
    minute = 0
    while True:
        numbers = history.append(
            [
                observation(minute % 600),
                *(record(RecordKind.NOTE, text="x" * (minute % 7) * 300) for _ in range(minute % 3)),
            ],
            resume={"minute": minute},
        )
        _tell(f"{numbers[-1]}")
        minute += 1


def full(path: Path) -> None:
    import resource

    history = History.open(path, now=START, program_version="0.1.0", busy_s=0.0)
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (1_000_000, hard))
    recorded = history.count
    failures = 0
    while failures < 3:
        try:
            recorded = history.append([record(RecordKind.NOTE, text="x" * 10_000)], resume={"recorded": recorded})[-1]
        except NotRecorded as error:
            failures += 1
            _tell(f"not recorded: {error}")
    _tell(f"recorded {recorded} counted {history.count}")
    resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
    recorded = history.append([record(RecordKind.NOTE, text="room again")], resume={"recorded": recorded})[-1]
    _tell(f"recorded {recorded} counted {history.count}")
    history.close(now=START)


if __name__ == "__main__":
    {"endless": endless, "full": full}[sys.argv[1]](Path(sys.argv[2]))
