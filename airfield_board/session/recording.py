"""Writing down what happens, whether the history can take it at once or only later."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from datetime import datetime
from hashlib import sha256
from pathlib import Path

from airfield_board.configuration.model import Profile
from airfield_board.errors import UserError
from airfield_board.history.errors import NotRecorded
from airfield_board.history.records import Json, Record, RecordKind
from airfield_board.history.store import History

_ACKNOWLEDGING = (RecordKind.ACKNOWLEDGEMENT, RecordKind.ACKNOWLEDGEMENT_WITHDRAWN)


class Recording:
    """Records into a history; keeps in memory, in order, what could not be recorded yet.

    Until a record has its number it goes by a negative one of its own, by which acknowledgements may name it too.

    Parameters
    ----------
    history
        None where it could not be opened.
    problem
        Why it could not.
    reopen
        For `opens` while there is no history; None: another recorder records into it, and this one only watches.
    """

    def __init__(self, history: History | None, problem: str, reopen: Callable[[], History] | None) -> None:
        self.history = history
        self.problem = problem
        self._reopen = reopen
        self._waiting: list[Record] = []
        self._provisional: list[int] = []
        self._next_provisional = -1

    def write(self, records: Sequence[Record], resume: Mapping[str, Json]) -> tuple[tuple[int, ...], dict[int, int]]:
        """Record, after whatever still waits.

        Parameters
        ----------
        resume
            The recorder's memory after them.

        Returns
        -------
        tuple
            The numbers of the given records, negative ones where they had to be kept back; and for records kept
            back before that are recorded now: their negative number and their number.
        """
        numbers = tuple(range(self._next_provisional, self._next_provisional - len(records), -1))
        self._next_provisional -= len(records)
        if self.history is None and self._reopen is None:
            return numbers, {}
        waiting = [*self._waiting, *records]
        provisional = [*self._provisional, *numbers]
        if not waiting:
            return (), {}
        try:
            if self.history is None:
                raise NotRecorded(self.problem)
            first = self.history.count + 1
            found = {old: first + place for place, old in enumerate(provisional)}
            self.history.append(
                [
                    _named(late(record) if place < len(self._waiting) else record, found)
                    for place, record in enumerate(waiting)
                ],
                resume=resume,
            )
        except UserError as error:
            self._waiting, self._provisional, self.problem = waiting, provisional, str(error)
            return numbers, {}
        moved = {old: found[old] for old in self._provisional}
        self._waiting, self._provisional, self.problem = [], [], ""
        return tuple(found[old] for old in numbers), moved

    def opens(self) -> bool:
        """Try to open a history that could not be opened so far, if something waits; return whether that went well."""
        if self.history is not None or self._reopen is None or not self._waiting:
            return False
        try:
            self.history = self._reopen()
        except UserError as error:
            self.problem = str(error)
            return False
        return True

    def knows_more(self) -> bool:
        """Whether the history tells of a time before it was opened."""
        return self.history is not None and self.history.latest_configuration("fleet") is not None

    def take_kept_back(self) -> list[Record]:
        """Give away what waits to be recorded."""
        waiting, self._waiting, self._provisional = self._waiting, [], []
        return waiting

    @property
    def kept_back(self) -> int:
        """How many records wait to be recorded."""
        return len(self._waiting)

    def close(self, now: datetime) -> None:
        """Record the stop and close.

        Raises
        ------
        NotRecorded
            Where the stop, or what still waited, could not be recorded.
        """
        if self.history is not None:
            self.history.close(now=now)
        if self._waiting:
            raise NotRecorded(f"{len(self._waiting)} records could not be recorded: {self.problem}")


def _named(record: Record, numbers: Mapping[int, int]) -> Record:
    """Let an acknowledgement name records by their numbers in the history."""
    changes = record.body.get("changes")
    if record.kind not in _ACKNOWLEDGING or not isinstance(changes, Sequence):
        return record
    named = [numbers.get(change, change) for change in changes if isinstance(change, int)]
    return replace(record, body={**record.body, "changes": named})


def late(record: Record) -> Record:
    """Mark a record as one that was recorded some time after it happened."""
    return replace(record, body={**record.body, "recorded_late": True})


def place_of_history(profile: Profile, user_folder: Path) -> Path:
    """Return where the history of an airfield lies: as the profile says, else in the user's data folder.

    There its name bears a mark of the profile's place, so that two airfields of one name never share a history.
    """
    if profile.history is not None:
        return profile.history
    plain = "".join(sign if sign.isalnum() else "-" for sign in profile.name.lower()).strip("-")
    mark = sha256(str(profile.path.resolve()).encode(errors="surrogateescape")).hexdigest()[:8]
    return user_folder / f"{plain or 'airfield'}-{mark}.db"
