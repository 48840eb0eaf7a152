"""What a user can get wrong, said in plain words."""

import unicodedata
from collections.abc import Iterable
from dataclasses import dataclass

_LONGEST_SHOWN = 60


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class Fault:
    """One thing wrong in one file.

    Attributes
    ----------
    file
        The file's name as the user would type it.
    line
        Line number from 1; 0 where the fault is of the file as a whole.
    message
        What is wrong and what is expected.
    """

    file: str
    line: int
    message: str

    def __str__(self) -> str:
        """``file:line: message``, the form that editors can jump to."""
        return f"{self.file}:{self.line}: {self.message}" if self.line else f"{self.file}: {self.message}"


class UserError(Exception):
    """Wrong use or unreadable input; the message is meant for the user."""


class FileFaults(UserError):
    """All that is wrong in one or more files, together.

    Parameters
    ----------
    faults
        At least one fault.
    """

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


def shown(text: str) -> str:
    """Return a text from a file as a message may show it.

    Parameters
    ----------
    text
        Any text.

    Returns
    -------
    str
        In quotes, at most 60 characters of it, control characters and invisible ones as their codes.
    """
    cut = text[:_LONGEST_SHOWN]
    safe = "".join(
        f"<U+{ord(character):04X}>" if unicodedata.category(character)[0] in "CZ" and character != " " else character
        for character in cut
    )
    return f"'{safe}…'" if len(text) > _LONGEST_SHOWN else f"'{safe}'"


def reason_of(error: OSError) -> str:
    """Return what the system says of an error, without its number and the file's name."""
    return error.strerror or str(error)
