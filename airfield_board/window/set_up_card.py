"""The card of the set-up: three steps of a few questions, what was understood of them, and the way to the demo."""

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Literal

from PySide6.QtCore import QRectF, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QPaintEvent, QPalette, QPen
from PySide6.QtWidgets import (
    QComboBox,
    QGridLayout,
    QHBoxLayout,
    QLineEdit,
    QPushButton,
    QScrollArea,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from airfield_board.configuration.new_airfield import Answers
from airfield_board.window.answer_field import AnswerField, button, choice, line_edit, zone_choice
from airfield_board.window.canvas import CARD_RADIUS_PX
from airfield_board.window.dialogs import plain_label
from airfield_board.window.fonts import SEMIBOLD, font
from airfield_board.window.palette import LIGHT, Palette
from airfield_board.window.read_only_text import ReadOnlyText

STEPS: Mapping[str, tuple[str, ...]] = {
    "Airfield": ("name", "elevation", "time_zone"),
    "Observations": ("observation_file", "station", "row_time_zone", "expected_every_min", "stale_after_min"),
    "Types and limits": ("aircraft", "operation", "limit", "basis", "source", "folder"),
}
"""The questions by step."""

_TITLE_PX = 20
_MARGINS_PX = (24, 18, 24, 18)
_SPACING_PX = 8
_PREVIEW_PX = 110
_MOST_NOTE_LINES = 5
_ABOUT = (
    "Where the airfield is, and how high.",
    "The file that your weather station or logger writes. It is only ever read.",
    "The first aircraft and its limit; more are added in the fleet file. Then the files are written.",
)
_BASES = ("flight manual", "operator policy", "local order", "not said")
_NEXT, _WRITE = "&Next", "&Write the files and open the board"


class SetUpCard(QWidget):
    """Asks, and shows what is said of the answers.

    Signals
    -------
    changed()
        An answer has changed.
    file_asked(), folder_asked()
        The observation file, or the folder, is to be chosen from a list.
    folder_typed()
        The folder was changed by hand.
    write_asked()
        The files are to be written.
    open_asked(), demo_asked()
        A profile is to be opened instead; the demo is.

    Parameters
    ----------
    zones
        Names of the time zones.
    note
        What stands at the top.
    """

    changed = Signal()
    file_asked = Signal()
    folder_asked = Signal()
    folder_typed = Signal()
    write_asked = Signal()
    open_asked = Signal()
    demo_asked = Signal()

    def __init__(self, zones: Sequence[str], note: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Set up an airfield")
        self._colours = LIGHT
        self._problems: Mapping[str, str] = {}
        self._writing = False
        self.elevation_unit = choice(("ft", "m"), "Unit of the elevation")
        self.limit_unit = choice(("ft", "m"), "Unit of the limit")
        self.fields = _fields(zones, self.elevation_unit, self.limit_unit, self.file_asked.emit, self.folder_asked.emit)
        self.note = plain_label()
        self.say(note)
        self.preview = ReadOnlyText("What was understood of the observation file", least_px=_PREVIEW_PX)
        self.pages = QStackedWidget()
        for step, names in enumerate(STEPS.values()):
            self.pages.addWidget(self._page(step, names))
        self.step_buttons: list[QPushButton] = []
        self.missing = plain_label()
        self.missing.setAccessibleName("What is still missing")
        self.open_profile = button("Open a &profile …", self.open_asked.emit)
        self.back = button("&Back", lambda: self.show_step(self.step - 1))
        self.action = button(_NEXT, self.go_on)
        self._arrange()
        for field in self.fields.values():
            field.on_change(self.changed.emit)
        folder = self.fields["folder"].editor
        if isinstance(folder, QLineEdit):
            folder.textEdited.connect(lambda _: self.folder_typed.emit())
        for unit in (self.elevation_unit, self.limit_unit):
            unit.currentTextChanged.connect(lambda _: self.changed.emit())
        self.show_step(0)

    @property
    def step(self) -> int:
        """The step that is shown, from 0."""
        return self.pages.currentIndex()

    def answers(self) -> Answers:
        """Return the answers as they stand."""
        said = {name: field.text for name, field in self.fields.items() if name != "folder"}
        if said["basis"] == _BASES[-1]:
            said["basis"] = ""
        return Answers(elevation_unit=_unit(self.elevation_unit), limit_unit=_unit(self.limit_unit), **said)

    def folder(self) -> Path:
        """Return the folder for the files, as answered."""
        return Path(self.fields["folder"].text.strip())

    def show_step(self, step: int) -> None:
        """Show another step and begin with its first question."""
        if not 0 <= step < len(STEPS):
            return
        self.pages.setCurrentIndex(step)
        self._colour_steps()
        self.back.setEnabled(step > 0)
        self._refresh()
        self._names(step, self.fields)[0].editor.setFocus()

    def set_colours(self, colours: Palette) -> None:
        """Take other colours."""
        self._colours = colours
        self._colour_steps()
        self.update()

    def _colour_steps(self) -> None:
        colours = self._colours
        for index, each in enumerate(self.step_buttons):
            here = index == self.step
            each.setChecked(here)
            palette = QPalette(self.palette())
            palette.setColor(QPalette.ColorRole.Button, QColor(colours.accent if here else colours.cell))
            palette.setColor(QPalette.ColorRole.ButtonText, QColor(colours.on_accent if here else colours.ink))
            each.setPalette(palette)

    def go_on(self) -> None:
        """Show the next step; after the last, ask for the files where nothing is missing."""
        for field in self._names(self.step, self.fields):
            field.touched = True
        self.show_problems(self._problems, {})
        if self.step < len(STEPS) - 1:
            self.show_step(self.step + 1)
        elif not self._problems and not self._writing:
            self.write_asked.emit()

    def show_problems(self, problems: Mapping[str, str], hints: Mapping[str, str]) -> None:
        """Say beside each question what is wrong with its answer, or what it means.

        Parameters
        ----------
        problems
            By the question's name.
        hints
            The same; those not given stay as they are.
        """
        self._problems = problems
        for name, field in self.fields.items():
            field.say(problems.get(name, ""), hints.get(name))
        self._refresh()

    def show_preview(self, lines: Sequence[str]) -> None:
        """Say what was understood of the observation file."""
        text = "\n".join(lines)
        if text != self.preview.toPlainText():
            self.preview.setPlainText(text)

    def say(self, note: str) -> None:
        """Show something at the top; of a long text its first lines."""
        lines = note.splitlines()
        shown = lines if len(lines) <= _MOST_NOTE_LINES else [*lines[: _MOST_NOTE_LINES - 1], "… and more."]
        self.note.setText("\n".join(shown))

    def set_writing(self, *, writing: bool) -> None:
        """Take no second order while the files are being written."""
        self._writing = writing
        self._refresh()

    def _refresh(self) -> None:
        last = self.step == len(STEPS) - 1
        self.action.setText(_WRITE if last else _NEXT)
        self.action.setEnabled(not self._writing and not (last and self._problems))
        for index, (step, each) in enumerate(zip(STEPS.items(), self.step_buttons, strict=True)):
            title, names = step
            open_ones = sum(name in self._problems for name in names)
            each.setText(f"&{index + 1}  {title} · " + (f"{open_ones} to do" if open_ones else "done"))
        self.missing.setText(self._missing_text())

    def _missing_text(self) -> str:
        if self._writing:
            return "Writing the files …"
        if not self._problems:
            return "Nothing is missing."
        if "" in self._problems:
            return self._problems[""]
        names = [self.fields[name].label.text().replace("&", "") for name in self.fields if name in self._problems]
        return f"To do: {', '.join(names)}."

    @staticmethod
    def _names(step: int, fields: Mapping[str, AnswerField]) -> list[AnswerField]:
        return [fields[name] for name in tuple(STEPS.values())[step]]

    def _page(self, step: int, names: Sequence[str]) -> QWidget:
        page = QWidget()
        column = QVBoxLayout(page)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(plain_label(_ABOUT[step]))
        grid = QGridLayout()
        grid.setVerticalSpacing(_SPACING_PX)
        grid.setHorizontalSpacing(16)
        grid.setColumnStretch(2, 1)
        for name in names:
            self.fields[name].add_to(grid)
        column.addLayout(grid)
        if "observation_file" in names:
            column.addWidget(self.preview, 1)
        else:
            column.addStretch(1)
        room = QScrollArea()  # where the window is low, what does not fit is scrolled to
        room.setFrameShape(QScrollArea.Shape.NoFrame)
        room.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        room.setWidgetResizable(True)
        room.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        room.viewport().setAutoFillBackground(False)
        room.setWidget(page)
        page.setAutoFillBackground(False)
        return room

    def _arrange(self) -> None:
        title = plain_label("Set up an airfield")
        title.setFont(font(_TITLE_PX, SEMIBOLD))
        steps = QHBoxLayout()
        for index in range(len(STEPS)):
            each = QPushButton()
            each.setCheckable(True)
            each.clicked.connect(lambda _checked, step=index: self.show_step(step))
            self.step_buttons.append(each)
            steps.addWidget(each, 1)
        self.demo = button("Open the &demo instead", self.demo_asked.emit)
        steps.addWidget(self.demo)
        foot = QHBoxLayout()
        foot.addWidget(self.open_profile)
        foot.addWidget(self.missing, 1)
        foot.addWidget(self.back)
        foot.addWidget(self.action)
        column = QVBoxLayout(self)
        column.setContentsMargins(*_MARGINS_PX)
        column.setSpacing(12)
        for widget in (title, self.note):
            column.addWidget(widget)
        column.addLayout(steps)
        column.addWidget(self.pages, 1)
        column.addLayout(foot)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the card's ground and its edge."""
        del event
        painter = QPainter(self)
        try:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            painter.setPen(QPen(QColor(self._colours.line), 1.5))
            painter.setBrush(QColor(self._colours.card))
            room = QRectF(self.rect()).adjusted(1, 1, -1, -1)
            painter.drawRoundedRect(room, CARD_RADIUS_PX, CARD_RADIUS_PX)
        finally:
            painter.end()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Enter presses the button it is on, and in a field goes on."""
        if event.key() not in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            super().keyPressEvent(event)
            return
        focused = self.focusWidget()
        if isinstance(focused, QPushButton):
            focused.click()
        elif self.action.isEnabled():
            self.go_on()


def _unit(box: QComboBox) -> Literal["ft", "m"]:
    return "m" if box.currentText() == "m" else "ft"


def _fields(
    zones: Sequence[str],
    elevation_unit: QComboBox,
    limit_unit: QComboBox,
    ask_for_file: Callable[[], object],
    ask_for_folder: Callable[[], object],
) -> dict[str, AnswerField]:
    basis = choice(_BASES, "What the limit rests on")
    return {
        "name": AnswerField("Air&field's name", line_edit(), "as the board shows it"),
        "elevation": AnswerField("&Elevation", line_edit("such as 4120"), "of the field", elevation_unit),
        "time_zone": AnswerField("&Time zone", zone_choice(zones), "type a city, such as Vienna"),
        "observation_file": AnswerField(
            "Observation &file",
            line_edit(),
            "CSV, JSON or METAR; it may come into being later",
            button("C&hoose …", ask_for_file),
        ),
        "station": AnswerField(
            "&Station", line_edit("may be left empty"), "METAR only, where the file holds several stations"
        ),
        "row_time_zone": AnswerField(
            "Time &zone of its times", zone_choice(zones), "only if they are not the airfield's; empty: they are"
        ),
        "expected_every_min": AnswerField("An observation e&very", line_edit(text="5"), "minutes"),
        "stale_after_min": AnswerField(
            "Sta&le after", line_edit(text="15"), "minutes; an older observation is NO DATA"
        ),
        "aircraft": AnswerField("Air&craft", line_edit("such as Two-seat trainer"), "a type, or one airframe"),
        "operation": AnswerField("&Operation", line_edit(text="Departure"), "a row of the board"),
        "limit": AnswerField(
            "&Greatest density altitude", line_edit("such as 6350"), "above it the operation is on HOLD", limit_unit
        ),
        "basis": AnswerField("It &rests on", basis, "where the limit comes from"),
        "source": AnswerField("&Stands in", line_edit("may be left empty"), "such as Operations manual 4.2"),
        "folder": AnswerField(
            "Folder for the &files",
            line_edit(),
            "profile.yaml, fleet.yaml and their schemas; nothing is overwritten",
            button("C&hoose …", ask_for_folder),
        ),
    }
