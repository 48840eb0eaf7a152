"""The details of a row, in a window that goes on with the board."""

from collections.abc import Sequence

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QPainter, QPalette
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFrame,
    QGridLayout,
    QLabel,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from airfield_board.window import formatting
from airfield_board.window.canvas import Canvas
from airfield_board.window.details import Details, DetailSection, details_of
from airfield_board.window.dialogs import plain_label
from airfield_board.window.fonts import BOLD, MEDIUM, SEMIBOLD, font
from airfield_board.window.lettering import Lettering, width_of
from airfield_board.window.marks import mark_colour, paint_mark
from airfield_board.window.palette import Palette
from airfield_board.window.reading import View

_SIZE_PX = (760, 720)
_MARGINS_PX = (20, 16, 20, 16)
_LABEL_PX = 128
_HEAD_PX = 76
GONE = "This operation is no longer in the fleet file."


class DetailsDialog(QDialog):
    """Shows all of the rows it was opened for, as long as it is open.

    Call `open_for` with their keys, and `show_view` with each new view of the board.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Details")
        self.resize(*_SIZE_PX)
        self._keys: tuple[str, ...] = ()
        self._shown: Details | None = None
        self._cards: list[_Card] = []
        self._texts: list[tuple[QLabel, QLabel, QLabel]] = []
        self.head = DetailsHead(self)
        self.page = QWidget()
        self.sections = QVBoxLayout(self.page)
        self.sections.setContentsMargins(4, 4, 4, 4)
        self.sections.setSpacing(10)
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.area.setWidget(self.page)
        buttons = QDialogButtonBox()
        buttons.addButton("Close", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.rejected.connect(self.reject)
        body = QVBoxLayout(self)
        body.setContentsMargins(*_MARGINS_PX)
        body.addWidget(self.head)
        body.addWidget(self.area, 1)
        body.addWidget(plain_label(formatting.CAUTION))
        body.addWidget(buttons)

    @property
    def details(self) -> Details | None:
        """What is shown; None where the operation is gone."""
        return self._shown

    @property
    def keys(self) -> tuple[str, ...]:
        """Of the rows it was opened for."""
        return self._keys

    def open_for(self, keys: Sequence[str], view: View, colours: Palette) -> None:
        """Show other rows, and come to the front."""
        self._keys = tuple(keys)
        self._shown = None
        self._show(view, colours)
        self.area.verticalScrollBar().setValue(0)
        self.show()
        self.raise_()
        self.activateWindow()
        self.area.setFocus()

    def show_view(self, view: View, colours: Palette) -> None:
        """Show the same rows of another view; nothing is done while it is closed."""
        if self.isVisible():
            self._show(view, colours)

    def _show(self, view: View, colours: Palette) -> None:
        self.head.set_colours(colours)
        self._style(colours)
        rows = [row for row in view.rows if row.key in self._keys]
        if not rows:
            self._shown = None
            self.setWindowTitle("Details")
            self.head.show_details(None)
            self._fill(())
            return
        details = details_of(rows, view)
        if details == self._shown:
            return
        self._shown = details
        self.setWindowTitle(f"Details: {details.title}")
        self.head.show_details(details)
        self.area.setAccessibleName(f"Details of {details.title}")
        self.area.setAccessibleDescription(details.plain)
        self._fill(details.sections)

    def _fill(self, sections: Sequence[DetailSection]) -> None:
        lines = [line for section in sections for line in section.lines]
        shape = [(section.heading, len(section.lines)) for section in sections]
        if shape != self._shape():
            self._build(sections)
        for (label, text, source), line in zip(self._texts, lines, strict=True):
            label.setText(line.label)
            text.setText(line.text)
            text.setAccessibleName(f"{line.label}: {line.text}")
            source.setText(line.source)
            source.setVisible(bool(line.source))

    def _shape(self) -> list[tuple[str, int]]:
        return [(card.heading, card.count) for card in self._cards]

    def _build(self, sections: Sequence[DetailSection]) -> None:
        """Make the labels anew; where only words change they stay, and with them a selection and the place."""
        while (item := self.sections.takeAt(0)) is not None:
            if (old := item.widget()) is not None:
                old.hide()
                old.deleteLater()
        self._cards, self._texts = [], []
        for section in sections:
            card = _Card(section.heading, len(section.lines))
            self._cards.append(card)
            self._texts += card.texts
            self.sections.addWidget(card)
        self.sections.addStretch(1)

    def _style(self, colours: Palette) -> None:
        style = (
            f"QScrollArea {{ border: 2px solid {colours.hairline}; border-radius: 6px; }}"
            f" QScrollArea:focus {{ border: 2px solid {colours.accent}; }}"
        )
        if style != self.area.styleSheet():
            self.area.setStyleSheet(style)


class DetailsHead(Canvas):
    """Which row it is, and its state."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._details: Details | None = None
        self.setFixedHeight(_HEAD_PX)

    def show_details(self, details: Details | None) -> None:
        """Show another row's title and state; None: the operation is gone."""
        self._details = details
        said = GONE
        if details is not None:
            said = f"{details.title}, {formatting.STATE_WORDS[details.state]}, {details.next_change}"
        self.setAccessibleName(said)
        self.update()

    def paint(self, painter: QPainter, letters: Lettering) -> None:
        """Paint title, state and next change."""
        details, colours, right = self._details, self.colours, float(self.width())
        if details is None:
            letters.text((2, 26), GONE, colours.ink, 17, SEMIBOLD, room_px=right)
            return
        under_px = width_of(details.under, 13, MEDIUM) if details.under else 0.0
        left = letters.text((2, 24), details.title, colours.ink, 22, SEMIBOLD, room_px=max(right - under_px - 24, 80))
        if details.under:
            at = (left + 12, 24.0)
            letters.text(at, details.under, colours.soft_ink, 13, MEDIUM, room_px=max(right - left - 14, 0))
        mark = QRectF(2, 43, 17, 17)
        paint_mark(painter, details.state, mark, mark_colour(details.state, colours), colours.page)
        word = formatting.STATE_WORDS[details.state]
        left = letters.text((30, 58), word, colours.ink, 19, BOLD)
        room_px = max(right - left - 16, 0)
        letters.text((left + 14, 58), details.next_change, colours.soft_ink, 14, MEDIUM, room_px=room_px)


class _Card(QFrame):
    """A section: its heading, and a line for each fact."""

    def __init__(self, heading: str, count: int) -> None:
        super().__init__()
        self.heading, self.count = heading, count
        self.setAutoFillBackground(True)
        self.setBackgroundRole(QPalette.ColorRole.Base)
        grid = QGridLayout(self)
        grid.setContentsMargins(14, 12, 14, 12)
        grid.setHorizontalSpacing(14)
        grid.setVerticalSpacing(5)
        grid.setColumnMinimumWidth(0, _LABEL_PX)
        grid.setColumnStretch(1, 1)
        title = plain_label(heading)
        title.setFont(font(15, SEMIBOLD))
        grid.addWidget(title, 0, 0, 1, 2)
        self.texts: list[tuple[QLabel, QLabel, QLabel]] = []
        for place in range(count):
            label, text, source = plain_label(), plain_label(), plain_label()
            label.setWordWrap(False)
            for quiet in (label, source):
                quiet.setForegroundRole(QPalette.ColorRole.PlaceholderText)
            text.setFont(font(14, MEDIUM))
            source.setFont(font(12))
            top = Qt.AlignmentFlag.AlignTop
            row = 2 * place + 1
            grid.addWidget(label, row, 0, top)
            grid.addWidget(text, row, 1, top)
            grid.addWidget(source, row + 1, 1, top)
            self.texts.append((label, text, source))
