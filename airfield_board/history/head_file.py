"""The second place: a small file beside the history that says how many records it has and what the last hash is.

It proves that the tail has not been cut off and nothing was added behind the program's back, as long as nobody changed
both files to match. Against that stands a closing hash on paper or in another's hands.

The file is announced before a commit and confirmed after it. A program killed in between leaves both states in it, and
the history is at one of them. It is as long as one sector of a disk and written in its place by one call, so that it
holds either the old or the new text and costs each commit one short write more.
"""

import json
import os
from contextlib import suppress
from pathlib import Path

from airfield_board.history.chain import Head

_SIZE_BYTES = 512
"""One sector, which a disk writes as a whole; two states need some 220 bytes."""

_IN_PLACE = os.O_WRONLY | getattr(os, "O_BINARY", 0)


def head_path(history: Path) -> Path:
    """Return the path of the second place of a history."""
    return history.with_name(history.name + ".head")


def _text(heads: tuple[Head, ...]) -> str:
    text = json.dumps([{"hash": head.hash.hex(), "records": head.records} for head in heads])
    return text.ljust(_SIZE_BYTES - 1) + "\n"


def read_heads(history: Path) -> tuple[Head, ...] | None:
    """Return the states that the second place allows; None where there is no such file.

    Raises
    ------
    ValueError
        Where the file is not as it was written.
    OSError
        Where it cannot be read.
    """
    try:
        raw = head_path(history).read_bytes()
    except FileNotFoundError:
        return None
    try:
        entries = json.loads(raw)
        heads = tuple(Head(records=int(entry["records"]), hash=bytes.fromhex(entry["hash"])) for entry in entries)
    except (ValueError, TypeError, KeyError, RecursionError) as error:
        raise ValueError("the second place does not hold a count and a hash") from error
    # Anything that reads the same but is not the same byte by byte was not written by the program.
    if not heads or _text(heads).encode() != raw:
        raise ValueError("the second place is not as the program wrote it")
    return heads


def write_heads(history: Path, heads: tuple[Head, ...], *, durable: bool) -> None:
    """Write the second place anew, in one step.

    Parameters
    ----------
    durable
        True: it is on the disk when this returns. False: after a power failure either the old or the new text stands.

    Raises
    ------
    OSError
        Where it cannot be written; then the old text still stands, or the new one.
    """
    content = _text(heads).encode()
    if not _overwritten(head_path(history), content, durable=durable):
        _replace(head_path(history), content)


def _overwritten(target: Path, content: bytes, *, durable: bool) -> bool:
    """Write over the text that stands there; False where there is none of the same length."""
    try:
        handle = os.open(target, _IN_PLACE)
    except OSError:
        return False
    try:
        if os.fstat(handle).st_size != len(content) or os.write(handle, content) != len(content):
            return False
        if durable:
            _sync(handle)
    finally:
        os.close(handle)
    return True


def _replace(target: Path, content: bytes) -> None:
    fresh = target.with_name(target.name + ".new")
    try:
        with fresh.open("wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        fresh.replace(target)
    except OSError:
        with suppress(OSError):
            fresh.unlink()
        raise
    _sync_folder(target.parent)


def _sync(handle: int) -> None:
    # Time and length of the file do not matter; what was written does.
    if hasattr(os, "fdatasync"):
        os.fdatasync(handle)
    else:
        os.fsync(handle)


def _sync_folder(folder: Path) -> None:
    if os.name != "posix":  # a folder cannot be opened elsewhere, and a rename there is written through
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
