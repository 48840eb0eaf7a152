"""What a user can get wrong, said in plain words."""

from collections.abc import Iterable
from dataclasses import dataclass


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
