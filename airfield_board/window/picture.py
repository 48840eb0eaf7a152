"""A page painted to a picture, with no screen."""

from datetime import datetime, timedelta
from pathlib import Path

from PySide6.QtCore import QByteArray, QPoint, QSize
from PySide6.QtGui import QImage, QImageWriter, QRegion
from PySide6.QtWidgets import QApplication, QWidget

from airfield_board.session.board_state import BoardState
from airfield_board.window.board_view import BoardView, PageName


def paint_page(
    state: BoardState, now: datetime, *, page: PageName = PageName.BOARD, size_px: tuple[int, int], scheme: str
) -> QImage:
    """Paint a page with its times "as of" and "void after".

    Needs a running QApplication; see `offscreen_application`.
    """
    view = BoardView()
    view.resize(*size_px)
    view.set_scheme(scheme)
    view.set_page(page)
    view.show_state(state, now)
    view.set_picture(void_after(state, now, trusted=view.view is not None and view.view.trusted))
    view.ensure_plot()
    image = image_of(view)
    view.deleteLater()
    return image


def void_after(state: BoardState, now: datetime, *, trusted: bool) -> datetime | None:
    """Return until when a picture of a state holds: the moment at which its reading goes stale."""
    if state.observation is None or not trusted:
        return None
    return state.observation.time + timedelta(minutes=state.stale_after_min)


def image_of(view: QWidget) -> QImage:
    """Paint a widget and all in it to an image of its size."""
    image = QImage(QSize(view.width(), view.height()), QImage.Format.Format_RGB32)
    view.ensurePolished()
    view.render(
        image, QPoint(0, 0), QRegion(), QWidget.RenderFlag.DrawWindowBackground | QWidget.RenderFlag.DrawChildren
    )
    return image


def save_page(
    path: Path, state: BoardState, now: datetime, *, page: PageName, size_px: tuple[int, int], scheme: str
) -> None:
    """Paint a page to a PNG file.

    Raises
    ------
    OSError
        Where the file cannot be written.
    """
    image = paint_page(state, now, page=page, size_px=size_px, scheme=scheme)
    writer = QImageWriter(str(path), QByteArray(b"PNG"))
    if not writer.write(image):
        raise OSError(f"cannot write the picture {path}: {writer.errorString()}")


def offscreen_application() -> QApplication:
    """Return the running application; the caller has set the platform ``offscreen`` before Qt was loaded."""
    running = QApplication.instance()
    return running if isinstance(running, QApplication) else QApplication(["airfield-board"])
