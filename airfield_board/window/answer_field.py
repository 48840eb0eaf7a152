"""A question of the set-up: its label, its field, and beside it what is wrong with the answer or what it means."""

from collections.abc import Callable, Sequence
from typing import TypeAlias

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QCompleter, QGridLayout, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from airfield_board.window.dialogs import plain_label
from airfield_board.window.fonts import REGULAR, SEMIBOLD, font

_SAID_PX = 13
_EDITOR_PX = 340
_LABEL_PX = 190
_LONGEST = 1000

Editor: TypeAlias = QLineEdit | QComboBox


class AnswerField:
    """One question; what is wrong is said once something was typed, or once somebody wants to go on.

    Parameters
    ----------
    label
        With a mnemonic.
    editor
        Where the answer is given.
    hint
        Beside the field while nothing is wrong.
    beside
        What stands to the right of the editor: a unit, a button.
    """

    def __init__(self, label: str, editor: Editor, hint: str, beside: QWidget | None = None) -> None:
        self.editor = editor
        self.beside = beside
        self._hint = hint
        self._problem = ""
        self.touched = False
        self.label = QLabel(label)
        self.label.setBuddy(editor)
        self.label.setFixedWidth(_LABEL_PX)
        self.said = plain_label(hint)
        self.said.setMinimumHeight(2 * self.said.fontMetrics().lineSpacing())
        editor.setAccessibleName(label.replace("&", ""))
        self._show()

    @property
    def text(self) -> str:
        """The answer as typed."""
        return self.editor.text() if isinstance(self.editor, QLineEdit) else self.editor.currentText()

    def set_text(self, text: str) -> None:
        """Fill in an answer."""
        if isinstance(self.editor, QLineEdit):
            self.editor.setText(text)
        else:
            self.editor.setCurrentText(text)

    def on_change(self, act: Callable[[], object]) -> None:
        """Call something whenever the answer changes, by whatever means."""

        def changed(_text: str) -> None:
            self.touched = True
            act()

        if isinstance(self.editor, QLineEdit):
            self.editor.textChanged.connect(changed)
        else:
            self.editor.currentTextChanged.connect(changed)

    def say(self, problem: str, hint: str | None = None) -> None:
        """Say what is wrong with the answer, or where nothing is, what it means."""
        self._problem = problem
        self._hint = self._hint if hint is None else hint
        self._show()

    @property
    def shown_problem(self) -> str:
        """What is said to be wrong; empty where nothing is, or the question has not been come to."""
        return self._problem if self.touched else ""

    def _show(self) -> None:
        wrong = self.shown_problem
        text = wrong or self._hint
        if text != self.said.text():
            self.said.setText(text)
            self.editor.setAccessibleDescription(text)
        # Red belongs to HOLD: what is wrong is told by its weight and its words.
        self.said.setFont(font(_SAID_PX, SEMIBOLD if wrong else REGULAR))

    def add_to(self, grid: QGridLayout) -> None:
        """Take the next row of a grid of three columns."""
        row = grid.rowCount()
        answer = QWidget()
        answer.setFixedWidth(_EDITOR_PX)
        line = QHBoxLayout(answer)
        line.setContentsMargins(0, 0, 0, 0)
        line.addWidget(self.editor, 1)
        if self.beside is not None:
            line.addWidget(self.beside)
        grid.addWidget(self.label, row, 0)
        grid.addWidget(answer, row, 1)
        grid.addWidget(self.said, row, 2)


def line_edit(placeholder: str = "", text: str = "") -> QLineEdit:
    """Return a field for a line of text."""
    field = QLineEdit(text)
    field.setMaxLength(_LONGEST)
    field.setPlaceholderText(placeholder)
    return field


def choice(words: Sequence[str], name: str) -> QComboBox:
    """Return a choice among a few words."""
    box = QComboBox()
    box.addItems(list(words))
    box.setAccessibleName(name)
    return box


def zone_choice(zones: Sequence[str]) -> QComboBox:
    """Return a field for a time zone that completes what is typed; it begins empty."""
    box = QComboBox()
    box.setEditable(True)
    box.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
    box.addItems(["", *zones])
    box.setMaxVisibleItems(12)
    completer = QCompleter(list(zones), box)
    completer.setFilterMode(Qt.MatchFlag.MatchContains)
    completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
    box.setCompleter(completer)
    return box


def button(text: str, act: Callable[[], object]) -> QPushButton:
    """Return a button that Tab reaches."""
    made = QPushButton(text)
    made.clicked.connect(lambda: act())
    return made
