"""Reading YAML, with everything refused that could be read as something else.

PyYAML's events are put together here, not its nodes: nothing recurses, and depth and number are bounded as they come.
"""

import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import yaml

from airfield_board.configuration.yaml_nodes import Document, Entry, Mapping, Node, Refused, Scalar, Sequence
from airfield_board.errors import Fault, shown

LARGEST_FILE_BYTES = 1024 * 1024
_DEEPEST = 20
_MOST_NODES = 100_000

# What YAML 1.2 calls not printable (5.1), and the three line ends that YAML 1.1 knows beside CR and LF: no editor
# counts them as lines, so line numbers after one of them would mislead.
_UNWANTED = re.compile("[^\t\n\r\x20-\x7e\xa0-\u2027\u202a-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


class _StopReadingError(Exception):
    """The rest of the file is not worth reading."""

    def __init__(self, line: int, message: str) -> None:
        super().__init__(message)
        self.line = line
        self.message = message


@dataclass(slots=True, kw_only=True)
class _Open:
    """A collection whose end has not come yet."""

    line: int
    is_mapping: bool
    key_line: int
    key: str | None = None
    waits_for_key: bool = True
    entries: dict[str, Entry] = field(default_factory=dict)
    items: list[Node] = field(default_factory=list)


def read_document(content: bytes | str, file: str) -> Document:
    """Read a file's content into nodes.

    Parameters
    ----------
    content
        The bytes of the file, or its text.
    file
        Its name, for the faults.

    Returns
    -------
    Document
        With every fault that could be found: doubled keys, empty values, anchors, aliases, tags and merge keys are
        refused one by one; after bad bytes, control characters or broken YAML nothing more can be read.
    """
    if len(content) > LARGEST_FILE_BYTES:
        return _unreadable(file, 0, "the file is larger than 1 MiB; a settings file is expected")
    if isinstance(content, bytes):
        try:
            text = content.decode("utf-8")
        except UnicodeDecodeError as error:
            line = content.count(b"\n", 0, error.start) + 1
            return _unreadable(file, line, "this is not UTF-8 text; save the file as UTF-8")
    else:
        text = content
    text = text.removeprefix("\ufeff")
    unwanted = _UNWANTED.search(text)
    if unwanted is not None:
        line = len(re.findall(r"\r\n|\r|\n", text[: unwanted.start()])) + 1
        code = f"U+{ord(unwanted.group()):04X}"
        return _unreadable(file, line, f"a control character ({code}) stands here; plain text is expected")
    return _Reader(text, file).document()


def _unreadable(file: str, line: int, message: str) -> Document:
    return Document(file=file, root=None, faults=(Fault(file=file, line=line, message=message),))


class _Reader:
    """Puts nodes together from PyYAML's events; never goes deeper than a settings file needs."""

    def __init__(self, text: str, file: str) -> None:
        self._text = text
        self._file = file
        self._faults: list[Fault] = []
        self._open: list[_Open] = []
        self._root: Node | None = None
        self._nodes = 0

    def document(self) -> Document:
        """Read to the end, or to where reading must stop."""
        try:
            for event in self._events():
                self._take(event)
        except _StopReadingError as stop:
            self._refuse(stop.line, stop.message)
            self._root = None
            return Document(file=self._file, root=None, faults=tuple(self._faults))
        root = self._root
        if root is None or (isinstance(root, Scalar) and root.plain() is None):
            self._faults.clear()
            self._refuse(0, "the file is empty; settings are expected")
        elif not isinstance(root, Mapping | Refused):
            self._refuse(root.line, "keys with values are expected here, such as 'schema: 1'")
        return Document(file=self._file, root=root if isinstance(root, Mapping) else None, faults=tuple(self._faults))

    def _events(self) -> Iterator[yaml.Event]:
        loader = yaml.SafeLoader(self._text)
        try:
            while loader.check_event():
                yield loader.get_event()  # type: ignore[no-untyped-call]  # the stubs leave it untyped
        except yaml.MarkedYAMLError as error:
            mark = error.problem_mark or error.context_mark
            line = mark.line + 1 if mark is not None else 0
            raise _StopReadingError(line, _plain_problem(error)) from error
        except (yaml.YAMLError, ValueError, OverflowError, RecursionError) as error:
            # A character code or version number beyond all bounds gets through PyYAML's own checks.
            raise _StopReadingError(loader.line + 1, f"this is not valid YAML ({shown(str(error))})") from error
        finally:
            loader.dispose()

    def _refuse(self, line: int, message: str) -> None:
        self._faults.append(Fault(file=self._file, line=line, message=message))

    def _take(self, event: yaml.Event) -> None:
        line = event.start_mark.line + 1 if event.start_mark is not None else 0
        if isinstance(event, yaml.DocumentStartEvent):
            if self._root is not None:
                raise _StopReadingError(line, "a second document begins here; a settings file holds one")
        elif isinstance(event, yaml.AliasEvent):
            self._refuse(line, f"aliases ({shown(f'*{event.anchor}')}) are not read; write the value out")
            self._place(Refused(line=line), line)
        elif isinstance(event, yaml.ScalarEvent):
            self._place(self._scalar(event, line), line)
        elif isinstance(event, yaml.CollectionStartEvent):
            self._look_at_marks(event, line)
            self._begin(line, is_mapping=isinstance(event, yaml.MappingStartEvent))
        elif isinstance(event, yaml.CollectionEndEvent):
            self._end()

    def _look_at_marks(self, event: Any, line: int) -> bool:  # noqa: ANN401 - PyYAML's node events share no type
        """Say what is wrong with an anchor or a tag; whether there was a tag."""
        if event.anchor is not None:
            self._refuse(line, f"anchors ({shown(f'&{event.anchor}')}) are not read; leave it out")
        if event.tag is not None:
            self._refuse(line, f"tags ({shown(event.tag)}) are not read; leave it out")
        return event.tag is not None

    def _scalar(self, event: yaml.ScalarEvent, line: int) -> Node:
        if self._look_at_marks(event, line):
            return Refused(line=line)
        if any(unicodedata.category(character) == "Cs" for character in event.value):
            self._refuse(line, "half a character (a lone surrogate) stands here; plain text is expected")
            return Refused(line=line)
        return Scalar(line=line, text=event.value, quoted=bool(event.style))

    def _begin(self, line: int, *, is_mapping: bool) -> None:
        if len(self._open) >= _DEEPEST:
            raise _StopReadingError(line, f"this is nested more than {_DEEPEST} deep; no settings file needs that")
        self._open.append(_Open(line=line, is_mapping=is_mapping, key_line=line))

    def _end(self) -> None:
        closed = self._open.pop()
        node: Node
        if closed.is_mapping:
            node = Mapping(line=closed.line, by_key=closed.entries)
        else:
            node = Sequence(line=closed.line, items=tuple(closed.items))
        self._place(node, closed.line)

    def _count(self, line: int) -> None:
        self._nodes += 1
        if self._nodes > _MOST_NODES:
            raise _StopReadingError(line, f"the file has more than {_MOST_NODES} values; a settings file is expected")

    def _place(self, node: Node, line: int) -> None:
        """Put a finished node where it belongs."""
        self._count(line)
        if not self._open:
            self._root = node
            return
        parent = self._open[-1]
        if not parent.is_mapping:
            if isinstance(node, Scalar) and node.plain() is None:
                self._refuse(line, "this list item is empty; give it a value or take it out")
            parent.items.append(node)
        elif parent.waits_for_key:
            parent.key, parent.key_line, parent.waits_for_key = self._key(node, parent), line, False
        else:
            parent.waits_for_key = True
            if parent.key is not None:
                self._keep(parent, parent.key, node)

    def _key(self, node: Node, parent: _Open) -> str | None:
        """Return the key a node stands for; None where it is refused, and its value with it."""
        if not isinstance(node, Scalar):
            if not isinstance(node, Refused):
                self._refuse(node.line, "a list or mapping cannot be a key; a plain word is expected")
            return None
        if node.text == "<<" and not node.quoted:
            self._refuse(node.line, "merge keys (<<) are not read; write the values out")
            return None
        earlier = parent.entries.get(node.text)
        if earlier is not None:
            self._refuse(node.line, f"{shown(node.text)} is given twice; it stands in line {earlier.line} already")
            return None
        return node.text

    def _keep(self, parent: _Open, key: str, node: Node) -> None:
        if isinstance(node, Scalar) and node.plain() is None:
            if node.text:
                hint = f"; put quotes round {shown(node.text)} if it is meant as text"
            else:
                hint = "; give it one, or take the line out"
            self._refuse(parent.key_line, f"{shown(key)} has no value{hint}")
            node = Refused(line=parent.key_line)
        parent.entries[key] = Entry(key=key, line=parent.key_line, node=node)


def _plain_problem(error: yaml.MarkedYAMLError) -> str:
    """Word a syntax error of PyYAML's for somebody who has never heard of tokens."""
    problem = error.problem or ""
    if r"'\t'" in problem:
        return "a tab stands here; indent with blanks"
    for sign, advice in _SYNTAX_ADVICE:
        if sign in problem:
            return f"this is not valid YAML: {advice}"
    return f"this is not valid YAML ({shown(problem)}); look at the indents, quotes and brackets here and just before"


_SYNTAX_ADVICE = (
    ("mapping values are not allowed", "a second ': ' stands in this line; put quotes round a text that holds one"),
    ("could not find expected ':'", "a key without its ':' stands here or in the line before"),
    ("found unexpected end of stream", "a quote is opened and never closed"),
    ("expected <block end>", "the indent does not fit the lines before"),
    ("expected ',' or", "a bracket or brace is opened and not closed, or a comma is missing"),
)
