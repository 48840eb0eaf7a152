"""A line under the board for what just happened, with at most one thing to do about it."""

from collections.abc import Callable

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QFrame, QHBoxLayout, QPushButton, QSizePolicy, QWidget

from airfield_board.window.dialogs import plain_label


class NoticeBar(QFrame):
    """Hidden until something is said; a click dismisses it, and some notices go by themselves."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Notice")
        self.setAutoFillBackground(True)
        self._act: Callable[[], object] | None = None
        self.label = plain_label()
        self.label.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.action = QPushButton()
        self.action.clicked.connect(self._do)
        dismiss = QPushButton("Dismiss")
        dismiss.clicked.connect(self.dismiss)
        row = QHBoxLayout(self)
        row.setContentsMargins(16, 4, 16, 4)
        row.addWidget(self.label, 1)
        row.addWidget(self.action)
        row.addWidget(dismiss)
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self.dismiss)
        self.hide()

    def say(
        self, text: str, *, action: str = "", act: Callable[[], object] | None = None, for_s: float | None = None
    ) -> None:
        """Show a notice in the place of any before it.

        Parameters
        ----------
        text
            Plain.
        action, act
            What its button says and does; without, there is none.
        for_s
            How long it stays; None: until it is dismissed.
        """
        self.label.setText(text)
        self._act = act
        self.action.setText(action)
        self.action.setVisible(act is not None)
        self._timer.stop()
        if for_s is not None:
            self._timer.start(round(for_s * 1000))
        self.show()

    def dismiss(self) -> None:
        """Take the notice away."""
        self._timer.stop()
        self._act = None
        self.hide()

    def _do(self) -> None:
        act = self._act
        self.dismiss()
        if act is not None:
            act()
