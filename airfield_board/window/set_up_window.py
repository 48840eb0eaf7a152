"""The first start: the board drawn empty, and the card on it that makes an airfield of a few answers."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from functools import partial
from pathlib import Path
from zoneinfo import ZoneInfo, available_timezones

from PySide6.QtCore import QSize, QTimer, QTimeZone, Signal
from PySide6.QtGui import QCloseEvent, QGuiApplication, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QFileDialog, QMainWindow, QWidget

from airfield_board.clock import Clock
from airfield_board.configuration.new_airfield import (
    PROFILE_NAME,
    Draft,
    draft_of,
    elevation_of,
    observation_path,
    plain_id,
)
from airfield_board.configuration.new_files import in_the_way, write_new_airfield
from airfield_board.session.file_preview import FilePreview, FilePreviewer, PreviewQuestion
from airfield_board.window import formatting
from airfield_board.window.airfield_opener import AirfieldOpener
from airfield_board.window.background import Background, Outcome
from airfield_board.window.board_view import SMALLEST_PX
from airfield_board.window.empty_board import EmptyBoard, KnownAirfield
from airfield_board.window.header import HEIGHT_PX
from airfield_board.window.next_window import AirfieldNext, DemoNext, NextWindow
from airfield_board.window.palette import palette_for
from airfield_board.window.preview_words import preview_lines
from airfield_board.window.set_up_card import SetUpCard
from airfield_board.window.theme import SchemeChoice, apply_scheme, scheme_of

BEGINNING = "There is no airfield yet. Three short steps make one: two files that you can read, and edit at any time."
_FIRST_PX = QSize(1440, 900)
_SCREEN_EDGE_PX = QSize(40, 80)
_CARD_PX = QSize(1020, 640)
_LEAST_CARD_PX = 560
_LEAST_EDGE_PX = 10
_AXES_PX = 180
_TICK_MS = 1000
_PAUSE_MS = 250
"""How long typing must rest before the disk is looked at."""
_LOOK_AGAIN_MS = 2000
_FOLDER_NAME = "Airfield Board"
_NOTHING_TO_LOOK_AT = "Once the file and the time zones are known, what is understood of the file stands here."
_LOOKING = "Looking at the file …"


class SetUpWindow(QMainWindow):
    """Makes a new airfield, or leads to another profile or to the demo.

    Signals
    -------
    going_to(object)
        A `NextWindow`, as this one closes for it.

    Attributes
    ----------
    next_window
        What is to be opened when this one has closed; None: nothing.

    Parameters
    ----------
    clock
        The time.
    choice
        Light, dark, or as the system.
    documents
        The folder in which one for the new files is proposed.
    note
        What stands on the card; empty: that this is the beginning.
    """

    going_to = Signal(object)

    def __init__(self, clock: Clock, *, choice: SchemeChoice, documents: Path, note: str = "") -> None:
        super().__init__()
        self.next_window: NextWindow | None = None
        self._clock = clock
        self._choice = choice
        self._documents = documents
        self._folder_follows = True
        self._draft: Draft | None = None
        self._obstacle: tuple[Path, str] | None = None
        self._asked: PreviewQuestion | None = None
        self._previewer = FilePreviewer()
        self.setWindowTitle("Set up an airfield · Airfield Board")
        self.resize(_FIRST_PX.boundedTo(self.screen().availableSize() - _SCREEN_EDGE_PX))
        middle = QWidget()
        self.board = EmptyBoard(middle)
        self.card = SetUpCard(sorted(available_timezones()), note or BEGINNING, middle)
        self.setCentralWidget(middle)
        self.setMinimumSize(*SMALLEST_PX)
        self._middle = middle
        self.choose_scheme(choice)
        self._connect()
        zone = _machine_zone()
        if zone:
            self.card.fields["time_zone"].set_text(zone)
        self._propose_folder()
        self.card.show_preview([_NOTHING_TO_LOOK_AT])
        self._answers_changed()

    def _connect(self) -> None:
        card = self.card
        card.changed.connect(self._answers_changed)
        card.fields["name"].on_change(self._propose_folder)
        card.folder_typed.connect(self._keep_folder)
        card.file_asked.connect(self._ask_for_file)
        card.folder_asked.connect(self._ask_for_folder)
        card.write_asked.connect(self._write)
        card.demo_asked.connect(lambda: self._leave_for(DemoNext()))
        self.opener = AirfieldOpener(self)
        card.open_asked.connect(self.opener.ask)
        self.opener.opened.connect(self._leave_for)
        self.opener.refused.connect(self._say)
        self._looking = Background("observation preview", self)
        self._looking.ended.connect(self._take_look)
        self._writing = Background("new airfield", self)
        self._writing.ended.connect(self._take_written)
        self._look_timer = QTimer(self)
        self._look_timer.setSingleShot(True)
        self._look_timer.timeout.connect(self._look)
        self._ticker = QTimer(self)
        self._ticker.timeout.connect(self.tick)
        self._style_hints = QGuiApplication.styleHints()
        self._style_hints.colorSchemeChanged.connect(self._system_scheme_changed)

    def start(self) -> None:
        """Let the clock run."""
        self.tick()
        self._ticker.start(_TICK_MS)
        self.card.show_step(0)

    def choose_scheme(self, choice: SchemeChoice) -> None:
        """Show light or dark colours, or those of the system."""
        self._choice = choice
        scheme = scheme_of(choice)
        colours = palette_for(scheme, grey=False)
        apply_scheme(scheme)
        self.board.set_colours(colours)
        self.card.set_colours(colours)

    def _system_scheme_changed(self) -> None:
        if self._choice is SchemeChoice.SYSTEM:
            self.choose_scheme(self._choice)

    def show_fault(self, fault: str) -> None:
        """Say that the window itself met a fault; the answers stay."""
        self._say(f"The window met an unexpected fault ({fault}).")

    def tick(self) -> None:
        """Show the time, on a board with what is known of the airfield."""
        answers, problems = self.card.answers(), self._problems()
        known = KnownAirfield(
            name="" if "name" in problems else answers.name.strip(),
            elevation_m=None if "elevation" in problems else elevation_of(answers),
            altitude_unit=answers.elevation_unit,
            time_zone="" if "time_zone" in problems else answers.time_zone.strip(),
        )
        self.board.show_airfield(known, self._clock.now())

    # What the answers say.

    def _answers_changed(self) -> None:
        answers, folder = self.card.answers(), self.card.folder()
        self._draft = draft_of(answers, folder)
        self._show_problems()
        question = self._question()
        if question != self._asked:
            # What was understood of another file must not stand beside this one.
            self._asked = question
            self.card.show_preview([_NOTHING_TO_LOOK_AT if question is None else _LOOKING])
        self.tick()
        self._look_timer.start(_PAUSE_MS)

    def _show_problems(self) -> None:
        if self._draft is None:
            return
        problems = dict(self._draft.problems)
        if self._obstacle is not None and self._obstacle[0] == self._draft.folder and self._obstacle[1]:
            problems["folder"] = self._obstacle[1]
        self.card.show_problems(problems, self._hints(problems))

    def _problems(self) -> Mapping[str, str]:
        return self._draft.problems if self._draft is not None else {}

    def _hints(self, problems: dict[str, str]) -> dict[str, str]:
        """Say of answers without fault how they are understood."""
        answers, folder = self.card.answers(), self.card.folder()
        hints = {"time_zone": "type a city, such as Vienna", "elevation": "of the field"}
        elevation_m = elevation_of(answers)
        if elevation_m is not None and "elevation" not in problems:
            other = "m" if answers.elevation_unit == "ft" else "ft"
            hints["elevation"] = f"= {formatting.elevation(elevation_m, other)}"
        if "time_zone" not in problems:
            now, zone = self._clock.now(), ZoneInfo(answers.time_zone.strip())
            hints["time_zone"] = f"there it is {formatting.weekday(now, zone)}, {formatting.clock(now, zone)} now"
        path = observation_path(answers, folder)
        hints["observation_file"] = "CSV, JSON or METAR; it may come into being later"
        if path is not None and "observation_file" not in problems and str(path) != answers.observation_file.strip():
            hints["observation_file"] = f"in full: {path}"
        return hints

    def _propose_folder(self) -> None:
        """Let the folder follow the airfield's name until somebody gives another."""
        if not self._folder_follows:
            return
        name = self.card.fields["name"].text.strip()
        folder = self._documents / _FOLDER_NAME
        self.card.fields["folder"].set_text(str(folder / plain_id(name) if name else folder))

    def _keep_folder(self) -> None:
        self._folder_follows = False

    # What is looked at on the disk.

    def _look(self) -> None:
        if self._looking.busy:
            self._look_timer.start(_PAUSE_MS)
            return
        question, folder, now = self._question(), self.card.folder(), self._clock.now()
        self._looking.do(partial(_looked, self._previewer, question, folder, now))

    def _question(self) -> PreviewQuestion | None:
        answers, folder = self.card.answers(), self.card.folder()
        problems = self._problems()
        path = observation_path(answers, folder)
        if path is None or {"observation_file", "time_zone", "row_time_zone", "station"} & problems.keys():
            return None
        return PreviewQuestion(
            file=path,
            time_zone=answers.row_time_zone.strip() or answers.time_zone.strip(),
            station=answers.station.strip(),
            elevation_m=None if "elevation" in problems else elevation_of(answers),
        )

    def _take_look(self, outcome: Outcome) -> None:
        again_ms = _LOOK_AGAIN_MS
        if isinstance(outcome.made, _Look):
            look = outcome.made
            self._obstacle = (look.folder, look.obstacle)
            self._show_problems()
            if look.question == self._question():
                self.card.show_preview(self._preview_lines(look.preview))
            else:
                again_ms = 0
        else:
            self.card.show_preview([outcome.problem])
        self._look_timer.start(again_ms)

    def _preview_lines(self, preview: FilePreview | None) -> tuple[str, ...]:
        if preview is None:
            return (_NOTHING_TO_LOOK_AT,)
        answers = self.card.answers()
        known = "stale_after_min" not in self._problems()
        stale_after_min = float(answers.stale_after_min) if known else None
        return preview_lines(preview, ZoneInfo(answers.time_zone.strip()), stale_after_min, self._clock.now())

    def _ask_for_file(self) -> None:
        dialog = QFileDialog(self, "The observation file", str(self._documents))
        dialog.setFileMode(QFileDialog.FileMode.ExistingFile)
        dialog.fileSelected.connect(self.card.fields["observation_file"].set_text)
        self._show_dialog(dialog)

    def _ask_for_folder(self) -> None:
        dialog = QFileDialog(self, "The folder for the new files", str(self._documents))
        dialog.setFileMode(QFileDialog.FileMode.Directory)
        dialog.setOption(QFileDialog.Option.ShowDirsOnly)
        dialog.fileSelected.connect(self.card.fields["folder"].set_text)
        dialog.fileSelected.connect(lambda _: self._keep_folder())
        self._show_dialog(dialog)

    @staticmethod
    def _show_dialog(dialog: QFileDialog) -> None:
        dialog.finished.connect(dialog.deleteLater)
        dialog.open()

    # What ends it.

    def _write(self) -> None:
        draft = self._draft
        if draft is None or draft.problems or self._writing.busy:
            return
        self.card.set_writing(writing=True)
        self._writing.do(partial(_written, draft))

    def _take_written(self, outcome: Outcome) -> None:
        self.card.set_writing(writing=False)
        if isinstance(outcome.made, AirfieldNext):
            self._leave_for(outcome.made)
        else:
            self._say(f"The files were not written.\n{outcome.problem}")
            self._look_timer.start(0)

    def _leave_for(self, upcoming: NextWindow) -> None:
        self.next_window = upcoming
        self.close()
        self.going_to.emit(upcoming)

    def _say(self, note: str) -> None:
        self.card.say(note)

    # The window itself.

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Place the board, and the card on it."""
        super().resizeEvent(event)
        self._place()

    def showEvent(self, event: QShowEvent) -> None:
        """Place the parts before they are seen."""
        super().showEvent(event)
        self._place()

    def _place(self) -> None:
        room = self._middle.rect()
        self.board.setGeometry(room)
        width = min(_CARD_PX.width(), room.width() - 2 * _LEAST_EDGE_PX)
        # The axes stay in view where there is room for them.
        wanted = max(room.height() - _AXES_PX, _LEAST_CARD_PX)
        height = min(_CARD_PX.height(), wanted, room.height() - HEIGHT_PX - 2 * _LEAST_EDGE_PX)
        left, top = (room.width() - width) // 2, (room.height() + HEIGHT_PX - height) // 2
        self.card.setGeometry(left, top, width, height)
        self.card.raise_()

    def closeEvent(self, event: QCloseEvent) -> None:
        """Stop the clock."""
        self._ticker.stop()
        self._look_timer.stop()
        super().closeEvent(event)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Look:
    """What a look at the disk gave: at the observation file, and at the folder for the new files."""

    question: PreviewQuestion | None
    preview: FilePreview | None
    folder: Path
    obstacle: str


def _looked(previewer: FilePreviewer, question: PreviewQuestion | None, folder: Path, now: datetime) -> _Look:
    preview = None if question is None else previewer.look(question, now)
    return _Look(question=question, preview=preview, folder=folder, obstacle=in_the_way(folder))


def _written(draft: Draft) -> AirfieldNext:
    return AirfieldNext(profile_path=draft.folder / PROFILE_NAME, airfield=write_new_airfield(draft))


def _machine_zone() -> str:
    """Return the time zone that this machine is set to, where it names a place."""
    name = bytes(QTimeZone.systemTimeZoneId().data()).decode("ascii", "replace")
    return name if "/" in name and not name.startswith("Etc/") and name in available_timezones() else ""
