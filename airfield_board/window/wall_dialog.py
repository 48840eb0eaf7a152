"""Asks for the screen on the wall and how far away its farthest reader is."""

from collections.abc import Callable

from PySide6.QtCore import QLocale, Qt, Signal
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QDoubleSpinBox, QFormLayout, QVBoxLayout, QWidget

from airfield_board.window.dialogs import plain_label
from airfield_board.window.wall_size import DIAGONAL_RANGE_IN, DISTANCE_RANGE_M, WallSetup

_WIDTH_PX = 480
_MARGINS_PX = (20, 16, 20, 16)
_SPACING_PX = 12


class WallDialog(QDialog):
    """Two numbers, and in words what they come to.

    Signals
    -------
    chosen(object)
        A `WallSetup`.

    Parameters
    ----------
    setup
        The one in use.
    tell
        Says what a setup comes to; plain text.
    """

    chosen = Signal(object)

    def __init__(self, setup: WallSetup, tell: Callable[[WallSetup], str], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._tell = tell
        self.setWindowTitle("Wall view")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setMinimumWidth(_WIDTH_PX)
        form = QFormLayout()
        form.setSpacing(_SPACING_PX)
        self.diagonal = _number(form, "Diagonal of the screen, inches", setup.diagonal_in, DIAGONAL_RANGE_IN, 1.0)
        self.distance = _number(form, "Distance of the farthest reader, m", setup.distance_m, DISTANCE_RANGE_M, 0.5)
        self.said = plain_label()
        self.said.setAccessibleName("What these numbers come to")
        # The buttons bear words and no icons: those of Qt are red and green, which belong to the states.
        buttons = QDialogButtonBox()
        self.action = buttons.addButton("Use these", QDialogButtonBox.ButtonRole.AcceptRole)
        self.action.setDefault(True)
        buttons.addButton("Cancel", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.accepted.connect(self._choose)
        buttons.rejected.connect(self.reject)
        body = QVBoxLayout(self)
        body.setContentsMargins(*_MARGINS_PX)
        body.setSpacing(_SPACING_PX)
        body.addLayout(form)
        body.addWidget(self.said)
        body.addWidget(buttons)
        for field in (self.diagonal, self.distance):
            field.valueChanged.connect(lambda _: self._refresh())
        self._refresh()

    def setup(self) -> WallSetup:
        """Return the numbers as they stand."""
        return WallSetup(diagonal_in=self.diagonal.value(), distance_m=self.distance.value())

    def _refresh(self) -> None:
        self.said.setText(self._tell(self.setup()))

    def _choose(self) -> None:
        self.chosen.emit(self.setup())
        self.accept()


def _number(form: QFormLayout, label: str, value: float, limits: tuple[float, float], step: float) -> QDoubleSpinBox:
    field = QDoubleSpinBox()
    field.setLocale(QLocale.c())  # a point in numbers, as everywhere in the program
    field.setDecimals(1)
    field.setRange(*limits)
    field.setSingleStep(step)
    field.setValue(value)
    field.setAccessibleName(label)
    form.addRow(label, field)
    return field
