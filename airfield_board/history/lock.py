"""One recorder at a time: a lock of the operating system on a file beside the history.

The system releases it when the program ends, however it ends. The file says who holds it and stays where it is.
"""

import json
import os
import platform
import sys
import time
from contextlib import suppress
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from airfield_board.clock import iso_utc
from airfield_board.errors import UserError, reason_of
from airfield_board.history.errors import HistoryLocked

if sys.platform == "win32":
    import msvcrt

    _FAR_BYTE = 1 << 30
    """The byte that is locked lies behind the text: a locked byte cannot be read."""

    def _try_lock(handle: int) -> bool:
        os.lseek(handle, _FAR_BYTE, os.SEEK_SET)
        try:
            msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)
        except OSError:
            return False
        return True

    def _unlock(handle: int) -> None:
        os.lseek(handle, _FAR_BYTE, os.SEEK_SET)
        msvcrt.locking(handle, msvcrt.LK_UNLCK, 1)

else:
    import fcntl

    def _try_lock(handle: int) -> bool:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            return False
        return True

    def _unlock(handle: int) -> None:
        fcntl.flock(handle, fcntl.LOCK_UN)


_ATTEMPTS = 20
_PAUSE_S = 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class Holder:
    """Who records into a history: empty host and pid 0 where the file does not say."""

    host: str
    pid: int
    since: str

    def __str__(self) -> str:
        """Say it as a sentence has it."""
        if not self.host:
            return "another program"
        return f"the program running on {self.host} (process {self.pid}) since {self.since}"


def lock_path(history: Path) -> Path:
    """Return the path of the lock file of a history."""
    return history.with_name(history.name + ".lock")


def _read_holder(history: Path) -> Holder:
    try:
        told = json.loads(lock_path(history).read_bytes())
        return Holder(host=str(told["host"]), pid=int(told["pid"]), since=str(told["since"]))
    except (OSError, ValueError, TypeError, KeyError):
        return Holder(host="", pid=0, since="")


def holder_of(history: Path) -> Holder | None:
    """Return who records into a history just now; None where nobody does. Makes and changes no file."""
    try:
        handle = os.open(lock_path(history), os.O_RDONLY)
    except OSError:
        return None
    try:
        if _try_lock(handle):
            _unlock(handle)
            return None
    finally:
        os.close(handle)
    return _read_holder(history)


class RecorderLock:
    """The right to record into a history, held from `take` to `release` or the end of the program."""

    def __init__(self, handle: int) -> None:
        self._handle = handle

    @classmethod
    def take(cls, history: Path, *, now: datetime) -> "RecorderLock":
        """Take the lock.

        Raises
        ------
        HistoryLocked
            Where another recorder holds it; the message says who.
        UserError
            Where the lock file cannot be made.
        """
        try:
            handle = os.open(lock_path(history), os.O_RDWR | os.O_CREAT, 0o666)
        except OSError as error:
            raise UserError(f"{history}: cannot record here: {reason_of(error)}: {lock_path(history)}") from error
        # A reader that looks whether anybody records holds the lock for a moment: that is no recorder.
        for _ in range(_ATTEMPTS):
            if _try_lock(handle):
                break
            time.sleep(_PAUSE_S)
        else:
            os.close(handle)
            raise HistoryLocked(f"{history}: {_read_holder(history)} records into this history")
        told = {"host": platform.node() or "this machine", "pid": os.getpid(), "since": iso_utc(now)}
        # A full disk must not keep the lock from holding: then the file does not say who.
        with suppress(OSError):
            os.ftruncate(handle, 0)
            os.lseek(handle, 0, os.SEEK_SET)
            os.write(handle, json.dumps(told).encode())
        return cls(handle)

    def release(self) -> None:
        """Give the lock up."""
        with suppress(OSError):
            os.ftruncate(self._handle, 0)
        _unlock(self._handle)
        os.close(self._handle)
