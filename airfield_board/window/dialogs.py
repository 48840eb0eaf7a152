"""What the window asks of a person, and what it lists on request; text from files is always plain text."""

from collections.abc import Callable, Sequence
from datetime import datetime
from zoneinfo import ZoneInfo

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QDialog,
    QDialogButtonBox,
    QFormLayout,
    QHeaderView,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from airfield_board.session.board_state import AirfieldLine, BoardState, SettingChange, StatusChange, loudest_first
from airfield_board.window import formatting
from airfield_board.window.entry import Entry, Fields, local_text, read_entry, read_name

_WIDTH_PX = 560
_LIST_SIZE_PX = (880, 560)
_MARGINS_PX = (20, 16, 20, 16)
_SPACING_PX = 12


def plain_label(text: str = "") -> QLabel:
    """Return a label that wraps, can be copied from, and shows its text as it is."""
    label = QLabel()
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    label.setText(text)
    return label


class _Form(QDialog):
    """A dialog with an action and Cancel; the action can be pressed only when the form is complete.

    The buttons bear words and no icons: those of Qt are red and green, which belong to the states.
    """

    def __init__(self, parent: QWidget | None, title: str, action: str) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setMinimumWidth(_WIDTH_PX)
        self.body = QVBoxLayout(self)
        self.body.setContentsMargins(*_MARGINS_PX)
        self.body.setSpacing(_SPACING_PX)
        self.form = QFormLayout()
        self.form.setSpacing(_SPACING_PX)
        self.buttons = QDialogButtonBox()
        self.action: QPushButton = self.buttons.addButton(action, QDialogButtonBox.ButtonRole.AcceptRole)
        self.action.setDefault(True)
        self.buttons.addButton("Cancel", QDialogButtonBox.ButtonRole.RejectRole)
        self.buttons.rejected.connect(self.reject)

    def add_field(self, label: str, text: str = "") -> QLineEdit:
        """Add a short field with its label to the form, and return it."""
        field = QLineEdit(text)
        field.setMaxLength(20)
        field.setAccessibleName(label)
        self.form.addRow(label, field)
        return field


class AcknowledgeDialog(_Form):
    """Asks who has seen one or more status changes.

    Signals
    -------
    acknowledged(object)
        The initials, a str.
    """

    acknowledged = Signal(object)

    def __init__(
        self, changes: Sequence[StatusChange], zone: ZoneInfo, initials: str, parent: QWidget | None = None
    ) -> None:
        count = len(changes)
        super().__init__(parent, "Acknowledge", "Acknowledge" if count == 1 else f"Acknowledge all {count}")
        self.numbers = tuple(change.number for change in changes)
        self.listed = QPlainTextEdit("\n".join(_change_words(change, zone) for change in changes))
        self.listed.setReadOnly(True)
        self.listed.setAccessibleName("Status changes to acknowledge")
        self.listed.setFixedHeight(self.listed.fontMetrics().lineSpacing() * min(max(count, 2), 12) + 24)
        self.body.addWidget(self.listed)
        self.initials = self.add_field("Your initials", initials)
        self.body.addLayout(self.form)
        self.body.addWidget(self.buttons)
        self.initials.textChanged.connect(self._refresh)
        self.buttons.accepted.connect(self._acknowledge)
        self.initials.setFocus()
        self.initials.selectAll()
        self._refresh()

    def _refresh(self) -> None:
        self.action.setEnabled(read_name(self.initials.text()) != "")

    def _acknowledge(self) -> None:
        initials = read_name(self.initials.text())
        if initials:
            self.acknowledged.emit(initials)
            self.accept()


class TypeInDialog(_Form):
    """Asks for an observation, and stays open until the recorder has taken it.

    Signals
    -------
    typed(object)
        A `TypedObservation`.

    Parameters
    ----------
    airfield
        Its units and time zone.
    initials
        Remembered from before.
    now
        The window's clock.
    """

    typed = Signal(object)

    def __init__(
        self, airfield: AirfieldLine, initials: str, now: Callable[[], datetime], parent: QWidget | None = None
    ) -> None:
        super().__init__(parent, "Type in an observation", "Record it")
        self._airfield = airfield
        self._now = now
        self._opened = now()
        self._waiting = False
        self._refused = ""
        pressure = formatting.UNIT_WORDS[airfield.altimeter_unit]
        degrees = formatting.UNIT_WORDS[airfield.temperature_unit]
        self.time = self.add_field("Time, local", local_text(self._opened, ZoneInfo(airfield.time_zone)))
        self.altimeter = self.add_field(f"Altimeter setting, {pressure}")
        self.temperature = self.add_field(f"Temperature, {degrees}")
        self.dewpoint = self.add_field(f"Dew point, {degrees}")
        self.dewpoint.setPlaceholderText("may be left empty")
        self.initials = self.add_field("Your initials", initials)
        self.body.addLayout(self.form)
        self.said = plain_label()
        self.said.setAccessibleName("How the fields are understood")
        self.body.addWidget(self.said)
        self.body.addWidget(
            plain_label("It passes the same checks as the file's rows, and gives way to any newer row of the file.")
        )
        self.body.addWidget(self.buttons)
        for field in (self.time, self.altimeter, self.temperature, self.dewpoint, self.initials):
            field.textChanged.connect(self._changed)
        self.buttons.accepted.connect(self._record)
        self.altimeter.setFocus()
        self.refresh()

    def refresh(self) -> None:
        """Read the fields anew; the age that is shown goes on with the clock."""
        entry = self._entry()
        self.action.setEnabled(entry.observation is not None and not self._waiting)
        if self._waiting:
            self.said.setText("Recording it …")
        else:
            self.said.setText(self._refused or entry.reading or "\n".join(entry.problems))

    def refuse(self, problem: str) -> None:
        """Say why the recorder did not take it; the form can be corrected."""
        self._waiting = False
        self._refused = problem
        self.refresh()

    def _changed(self) -> None:
        self._refused = ""
        self.refresh()

    def _entry(self) -> Entry:
        fields = Fields(
            time=self.time.text(),
            altimeter=self.altimeter.text(),
            temperature=self.temperature.text(),
            dewpoint=self.dewpoint.text(),
            initials=self.initials.text(),
        )
        return read_entry(fields, self._airfield, self._opened, self._now())

    def _record(self) -> None:
        entry = self._entry()
        if entry.observation is None or self._waiting:
            self.refresh()
            return
        self._waiting = True
        self.refresh()
        self.typed.emit(entry.observation)


class WaitingSettingsDialog(_Form):
    """Shows loosened settings beside those in force, and asks who accepts them.

    Signals
    -------
    accepted_by(object)
        The name, a str.
    """

    accepted_by = Signal(object)

    def __init__(self, waiting: Sequence[SettingChange], name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent, "Settings waiting", "Put these in force")
        self.resize(*_LIST_SIZE_PX)
        self.shown = tuple(waiting)
        self.body.addWidget(
            plain_label(
                "The changed files loosen these settings. Until somebody accepts them by name, what is in force holds."
            )
        )
        rows = [(change.where, change.in_force, change.waiting) for change in self.shown]
        self.body.addWidget(_table(("Setting", "In force", "Waiting"), rows))
        self.name = self.add_field("Your name", name)
        self.body.addLayout(self.form)
        self.body.addWidget(self.buttons)
        self.name.textChanged.connect(self._refresh)
        self.buttons.accepted.connect(self._accept_settings)
        self.name.setFocus()
        self._refresh()

    def _refresh(self) -> None:
        self.action.setEnabled(read_name(self.name.text()) != "")

    def _accept_settings(self) -> None:
        name = read_name(self.name.text())
        if name:
            self.accepted_by.emit(name)
            self.accept()


class MessagesDialog(QDialog):
    """Lists what the program has to say: messages, refused settings, and every row that was not used, with why."""

    def __init__(self, state: BoardState, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Messages and unused rows")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.resize(*_LIST_SIZE_PX)
        self.messages = QPlainTextEdit()
        self.messages.setReadOnly(True)
        self.messages.setAccessibleName("Messages")
        self.rows = _table(("Time, local", "Why the row is not used"), ())
        buttons = QDialogButtonBox()
        buttons.addButton("Close", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.rejected.connect(self.reject)
        body = QVBoxLayout(self)
        body.setContentsMargins(*_MARGINS_PX)
        for widget in (plain_label("Messages"), self.messages, plain_label("Rows not used today"), self.rows, buttons):
            body.addWidget(widget)
        self._shown: tuple[object, ...] = ()
        self.show_state(state)

    def show_state(self, state: BoardState) -> None:
        """List a newer board's messages; where nothing has changed, a selection stays."""
        new = (state.messages, state.unused, state.not_recording)
        if new == self._shown:
            return
        self._shown = new
        zone = ZoneInfo(state.airfield.time_zone)
        self.messages.setPlainText(messages_text(state, zone))
        rows = [
            (formatting.stamp(when, zone) if when is not None else "no time", reason) for when, reason in state.unused
        ]
        _fill(self.rows, rows)


def messages_text(state: BoardState, zone: ZoneInfo) -> str:
    """Return all messages of a board as plain text, those that weigh most first."""
    parts = []
    if not state.recording:
        parts.append(f"NOT RECORDING: {state.not_recording}")
    for message in loudest_first(state.messages):
        when = f"{formatting.clock(message.time, zone)} " if message.time is not None else ""
        parts.append(f"{when}{message.text}")
    return "\n\n".join(parts) or "There are none."


def _change_words(change: StatusChange, zone: ZoneInfo) -> str:
    return f"{formatting.clock(change.time, zone)}  {formatting.STATE_WORDS[change.state]}  {change.label}"


def _table(headings: Sequence[str], rows: Sequence[Sequence[str]]) -> QTableWidget:
    table = QTableWidget(0, len(headings))
    table.setHorizontalHeaderLabels(list(headings))
    table.verticalHeader().hide()
    table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
    table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
    table.setWordWrap(True)
    header = table.horizontalHeader()
    header.setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
    header.setSectionResizeMode(len(headings) - 1, QHeaderView.ResizeMode.Stretch)
    _fill(table, rows)
    return table


def _fill(table: QTableWidget, rows: Sequence[Sequence[str]]) -> None:
    table.setRowCount(len(rows))
    for number, row in enumerate(rows):
        for column, text in enumerate(row):
            table.setItem(number, column, QTableWidgetItem(text))
    table.resizeRowsToContents()
