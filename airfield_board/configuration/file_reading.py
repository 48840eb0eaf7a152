"""Getting the bytes of a settings file, and what several keys of one must have in common."""

import os
import stat
from collections.abc import Iterable, Iterator
from hashlib import sha256
from pathlib import Path

from airfield_board.configuration.yaml_nodes import Document, Mapping, Scalar
from airfield_board.configuration.yaml_reader import LARGEST_FILE_BYTES
from airfield_board.errors import Fault, FileFaults, reason_of

_TRIES = 3


def read_settings_file(path: Path) -> bytes:
    """Return the bytes of a settings file, of one too large only as many as show that it is.

    Parameters
    ----------
    path
        The file.

    Returns
    -------
    bytes
        As they stood at one moment: a file that changes while it is read is read again.

    Raises
    ------
    FileFaults
        Where it cannot be read, with the reason in plain words.
    """
    try:
        if not stat.S_ISREG(path.stat().st_mode):
            raise _unreadable(path, "this is not a plain file; a settings file is expected")
        for _ in range(_TRIES):
            with path.open("rb") as file:
                before = os.fstat(file.fileno())
                content = file.read(LARGEST_FILE_BYTES + 1)
                after = os.fstat(file.fileno())
            whole = len(content) in (after.st_size, LARGEST_FILE_BYTES + 1)
            if whole and (before.st_size, before.st_mtime_ns) == (after.st_size, after.st_mtime_ns):
                return content
    except FileNotFoundError as error:
        raise _unreadable(path, "there is no such file") from error
    except PermissionError as error:
        raise _unreadable(path, "this user may not read the file") from error
    except (OSError, ValueError) as error:
        reason = reason_of(error) if isinstance(error, OSError) else str(error)
        raise _unreadable(path, f"the file cannot be read ({reason})") from error
    raise _unreadable(path, "the file is being written just now; it can be read once that is done")


def _unreadable(path: Path, message: str) -> FileFaults:
    return FileFaults([Fault(file=str(path), line=0, message=message)])


def text_and_hash(content: bytes | str) -> tuple[str, str]:
    """Return a settings file's full text, and the SHA-256 of its bytes in hexadecimal.

    Parameters
    ----------
    content
        Of a file that was read without fault.
    """
    data = content.encode() if isinstance(content, str) else content
    return data.decode(), sha256(data).hexdigest()


def in_order(faults: Iterable[Fault]) -> tuple[Fault, ...]:
    """Return faults by file and line, each once."""
    return tuple(sorted(set(faults)))


def number_under(section: Mapping, key: str) -> float | None:
    """Return the number that a key has; None where it has none."""
    entry = section.entry(key)
    value = entry.node.plain() if entry is not None and isinstance(entry.node, Scalar) else None
    return value if isinstance(value, int | float) and not isinstance(value, bool) else None


def text_under(section: Mapping, key: str) -> str | None:
    """Return the text that a key has; None where it has none."""
    entry = section.entry(key)
    value = entry.node.plain() if entry is not None and isinstance(entry.node, Scalar) else None
    return value if isinstance(value, str) else None


def section_under(section: Mapping, key: str) -> Mapping | None:
    """Return the keys under a key; None where there are none."""
    entry = section.entry(key)
    return entry.node if entry is not None and isinstance(entry.node, Mapping) else None


def given_twice(document: Document, section: Mapping, *groups: tuple[str, ...]) -> Iterator[Fault]:
    """Say where a quantity stands twice in one place.

    Parameters
    ----------
    groups
        Keys of one quantity each.
    """
    for group in groups:
        present = [entry for entry in section.entries if entry.key in group]
        for entry in present[1:]:
            first = present[0]
            yield document.fault(
                entry.line,
                f"{entry.key} gives again what {first.key} gives in line {first.line}; expected: one of them",
            )
