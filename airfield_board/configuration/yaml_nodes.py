"""A settings file as nodes that know their lines.

Plain values follow the core schema of YAML 1.2.2 (chapter 10.3), narrowed: a number is a plain decimal, so that ``no``,
``12:30``, ``017``, ``1e3`` and ``.inf`` stay the text they are, and a field that wants a number refuses them.
"""

import re
from dataclasses import dataclass
from typing import TypeAlias

from airfield_board.errors import Fault

PlainValue: TypeAlias = "str | int | float | bool | list[PlainValue] | dict[str, PlainValue] | None"
NodePath: TypeAlias = tuple[str | int, ...]

_NUMBER = re.compile(r"-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?", re.ASCII)
_MOST_DIGITS = 40
_NULLS = ("", "~", "null", "Null", "NULL")
_TRUTHS = {"true": True, "True": True, "TRUE": True, "false": False, "False": False, "FALSE": False}


def plain_number(text: str) -> int | float | None:
    """Return the number that a plain decimal text stands for.

    Parameters
    ----------
    text
        Such as ``6350``, ``-0.5``; no exponent, no leading zeros or plus sign, no separators.

    Returns
    -------
    int, float or None
        None where the text is anything else, or has more than 40 characters.
    """
    if len(text) > _MOST_DIGITS or _NUMBER.fullmatch(text) is None:
        return None
    number = float(text)
    return int(text) if number.is_integer() and "." not in text and abs(number) < 2**53 else number


@dataclass(frozen=True, slots=True, kw_only=True)
class Scalar:
    """A single value.

    Attributes
    ----------
    line
        From 1.
    text
        As written, without quotes.
    quoted
        Whether quotes (or a block style) make it text whatever it looks like.
    """

    line: int
    text: str
    quoted: bool

    def plain(self) -> PlainValue:
        """Return the value: text, a number, a truth value, or None for an empty one."""
        if self.quoted:
            return self.text
        if self.text in _NULLS:
            return None
        if self.text in _TRUTHS:
            return _TRUTHS[self.text]
        number = plain_number(self.text)
        return self.text if number is None else number


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A key and what stands under it; ``line`` is the key's."""

    key: str
    line: int
    node: "Node"


@dataclass(frozen=True, slots=True, kw_only=True)
class Mapping:
    """Keys with values, each key once.

    Attributes
    ----------
    line
        From 1.
    by_key
        The entries in the order of the file.
    """

    line: int
    by_key: dict[str, Entry]

    @property
    def entries(self) -> tuple[Entry, ...]:
        """The entries in the order of the file."""
        return tuple(self.by_key.values())

    def plain(self) -> PlainValue:
        """Return a dictionary of plain values."""
        return {entry.key: entry.node.plain() for entry in self.entries}

    def entry(self, key: str) -> Entry | None:
        """Return the entry of a key, if it is there."""
        return self.by_key.get(key)


@dataclass(frozen=True, slots=True, kw_only=True)
class Sequence:
    """A list."""

    line: int
    items: tuple["Node", ...]

    def plain(self) -> PlainValue:
        """Return a list of plain values."""
        return [item.plain() for item in self.items]


@dataclass(frozen=True, slots=True, kw_only=True)
class Refused:
    """Stands where something was refused; its fault is already known, so that nothing more is said about it."""

    line: int

    def plain(self) -> PlainValue:
        """Return None."""
        return None


Node: TypeAlias = Scalar | Mapping | Sequence | Refused


@dataclass(frozen=True, slots=True, kw_only=True)
class Document:
    """A file's keys, as far as they could be read.

    Attributes
    ----------
    file
        The file's name, as faults give it.
    root
        The keys at the top; None where the file could not be read to its end, or has none.
    faults
        All that was refused.
    """

    file: str
    root: Mapping | None
    faults: tuple[Fault, ...]

    def fault(self, line: int, message: str) -> Fault:
        """Return a fault of this file."""
        return Fault(file=self.file, line=line, message=message)

    def find(self, path: NodePath) -> tuple[Node | None, int]:
        """Return the node at a path and the line to name for it.

        Parameters
        ----------
        path
            Keys and list places from the top.

        Returns
        -------
        tuple
            The node, None where the path leads nowhere; and the line of the last key or list item found on the way.
        """
        node: Node | None = self.root
        line = 1
        for step in path:
            if isinstance(node, Mapping) and isinstance(step, str) and (entry := node.entry(step)) is not None:
                node, line = entry.node, entry.line
            elif isinstance(node, Sequence) and isinstance(step, int) and step < len(node.items):
                node = node.items[step]
                line = node.line
            else:
                return None, line
        return node, line
