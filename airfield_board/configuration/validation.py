"""A document against the keys and values that its kind of file has: every fault with its line, in plain words."""

import re
from collections.abc import Iterator, Mapping
from typing import Any, TypeVar, get_args

from pydantic import BaseModel, ValidationError

from airfield_board.configuration.file_models import NUMBER_TAG, TABLE_TAG
from airfield_board.configuration.wording import listed, suggestion
from airfield_board.configuration.yaml_nodes import Document, Node, NodePath, Refused, Scalar, Sequence
from airfield_board.errors import Fault, shown

FileModel = TypeVar("FileModel", bound=BaseModel)

_MOST_SUGGESTIONS = 50


def validate(model: type[FileModel], document: Document) -> tuple[FileModel | None, tuple[Fault, ...]]:
    """Check a document's keys and values, each by itself.

    Parameters
    ----------
    model
        What the file should hold.
    document
        What it holds; without a root nothing is checked.

    Returns
    -------
    tuple
        The values, None where something is wrong with one of them; and the faults, the document's own not among them.
    """
    if document.root is None:
        return None, ()
    try:
        return model.model_validate(document.root.plain()), ()
    except ValidationError as error:
        wording = _Wording(model, document)
        faults = (wording.fault(dict(found)) for found in error.errors(include_url=False, include_input=False))
        return None, tuple(fault for fault in faults if fault is not None)


def sections_in(annotation: object) -> Iterator[type[BaseModel]]:
    """Every section that a field's type speaks of, itself included."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        yield annotation
        return
    for part in get_args(annotation):
        yield from sections_in(part)


def keys_of(model: type[BaseModel]) -> tuple[str, ...]:
    """Return the keys of a section, as files write them."""
    return tuple(field.alias or name for name, field in model.model_fields.items())


def _path(location: tuple[int | str, ...]) -> NodePath:
    """Return pydantic's location without the names of a union's branches, which no file has."""
    return tuple(
        step
        for index, step in enumerate(location)
        if not (step in (NUMBER_TAG, TABLE_TAG) and index > 0 and str(location[index - 1]).startswith("max_"))
    )


class _Wording:
    """Says in plain words what is wrong with the values of one file."""

    def __init__(self, model: type[BaseModel], document: Document) -> None:
        self._model = model
        self._document = document
        self._suggestions_left = _MOST_SUGGESTIONS
        self._places: dict[str, str] = {}
        self._note_places(model, "at the top")

    def _note_places(self, model: type[BaseModel], place: str) -> None:
        for key, field in zip(keys_of(model), model.model_fields.values(), strict=True):
            self._places.setdefault(key, place)
            for section in sections_in(field.annotation):
                self._note_places(section, f"under '{key}'")

    def fault(self, found: Mapping[str, Any]) -> Fault | None:
        """Word one of pydantic's findings; None where the place was refused already."""
        path = _path(found["loc"])
        node, line = self._document.find(path)
        if isinstance(node, Refused):
            return None
        if found["type"] == "missing":
            return self._document.fault(line, self._missing(path))
        if found["type"] == "extra_forbidden":
            return self._document.fault(line, self._unknown(path))
        return self._document.fault(line, f"{self._label(path)}: {self._wrong(found, path, node)}")

    @staticmethod
    def _label(path: NodePath) -> str:
        """Name what is meant: the last key, and for an item of a list its place."""
        last = path[-1]
        if isinstance(last, int):
            return f"{path[-2]}, item {last + 1}"
        if len(path) > 1 and str(path[-2]).startswith("by_"):
            return f"{path[-2]}, {shown(last)}"
        return last

    def _section(self, path: NodePath) -> type[BaseModel]:
        """Return the section that a path leads to."""
        model = self._model
        for step in path:
            if isinstance(step, str):
                field = model.model_fields[step]
                model = next(sections_in(field.annotation))
        return model

    def _missing(self, path: NodePath) -> str:
        key = str(path[-1])
        section = self._section(path[:-1])
        field = next(field for name, field in section.model_fields.items() if key == (field.alias or name))
        if key in ("aircraft", "operations"):
            return f"{key} is missing; expected: '{key}:' and a list under it"
        if field.examples:
            return f"{key} is missing; expected: a line such as '{key}: {field.examples[0]}'"
        return f"{key} is missing; expected: '{key}:' and its own keys under it"

    def _unknown(self, path: NodePath) -> str:
        key = str(path[-1])
        known = keys_of(self._section(path[:-1]))
        if key in self._places:
            hint = f"; it belongs {self._places[key]}"
            if key == "by_pressure_altitude_ft":
                hint = "; only a temperature limit may go by pressure altitude"
            return f"{key} does not belong here{hint}"
        if self._suggestions_left <= 0:
            return f"unknown key {shown(key)}"
        self._suggestions_left -= 1
        near = suggestion(key, known)
        if near:
            return f"unknown key {shown(key)}; did you mean {near}?"
        elsewhere = suggestion(key, self._places)
        if elsewhere:
            return f"unknown key {shown(key)}; did you mean {elsewhere}, {self._places[elsewhere]}?"
        return f"unknown key {shown(key)}; expected: {listed(known)}"

    def _wrong(self, found: Mapping[str, Any], path: NodePath, node: Node | None) -> str:
        context: Mapping[str, Any] = found.get("ctx", {})
        kind = str(found["type"])
        if kind == "value_error":
            return str(context["error"])
        if kind == "literal_error":
            words = re.findall("'([^']*)'", str(context["expected"]))
            near = suggestion(node.text, words) if isinstance(node, Scalar) else ""
            hint = f"; did you mean '{near}'?" if near else ""
            return f"{_shown_value(node)} is not possible here; expected: {listed(words)}{hint}"
        if kind in _BOUNDS:
            name, words_for = _BOUNDS[kind]
            return f"{_shown_value(node)} is out of range; expected: {words_for} {_plain(context[name])}"
        if kind in ("float_type", "int_type"):
            return _no_number(node, "a number or a table" if str(path[-1]).startswith("max_") else "a number")
        if kind == "string_type":
            return _no_text(node)
        if kind in ("list_type", "model_type", "dict_type"):
            expected = "a list, each item with '- ' before it" if kind == "list_type" else "keys with values under it"
            return f"{_shown_value(node)} stands here; expected: {expected}"
        if kind == "too_short":
            return f"it has too few entries; expected: at least {context['min_length']}"
        if kind == "string_too_long":
            return f"the text is too long; expected: at most {context['max_length']} characters"
        return str(found["msg"])


_BOUNDS = {
    "greater_than": ("gt", "more than"),
    "greater_than_equal": ("ge", "at least"),
    "less_than_equal": ("le", "at most"),
}


def _plain(number: float) -> str:
    return f"{number:g}" if abs(number) < 1e5 else f"{number:.0f}"


def _shown_value(node: Node | None) -> str:
    if isinstance(node, Scalar):
        return shown(node.text)
    return "a list" if isinstance(node, Sequence) else "a group of keys"


def _no_number(node: Node | None, expected: str) -> str:
    if not isinstance(node, Scalar):
        return f"{_shown_value(node)} stands here; expected: {expected}"
    value = node.plain()
    if node.quoted:
        return f"{shown(node.text)} is text; expected: {expected}, without quotes"
    if isinstance(value, float):
        return f"{shown(node.text)} has decimals; expected: a whole number"
    return f"{shown(node.text)} is no plain decimal number; expected: digits as in 6350, -3 or 0.5"


def _no_text(node: Node | None) -> str:
    if not isinstance(node, Scalar):
        return f"{_shown_value(node)} stands here; expected: a text"
    return f'{shown(node.text)} is not read as text; expected: a text, so put it in quotes: "{node.text}"'
