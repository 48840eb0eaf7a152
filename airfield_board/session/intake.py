"""Which rows of a file that is read again and again are new."""

from collections.abc import Callable, Iterable

import numpy as np

from airfield_board.observations.observation import NO_TIME_US, ObservationTable

_MOST_KNOWN = 50_000
_SLACK = 2_000
END_US = int(np.iinfo(np.int64).max)
"""After all times."""


class Intake:
    """Knows the rows that have been taken, by their time and their text as it stood in the file.

    Of several rows with one time the last one in the file counts. Where that is not the one taken last, it is taken
    again, as the correction that it is.

    Parameters
    ----------
    recall
        From a stretch of time, [from, until) in microseconds: time and text of the rows of the file recorded of it
        before, in the order in which they were recorded, and of those without a readable time.
    """

    def __init__(self, recall: Callable[[int, int], Iterable[tuple[int, str]]]) -> None:
        self._recall = recall
        self._recalled_from_us: int | None = None
        self._known: set[tuple[int, str]] = set()
        self._last: dict[int, str] = {}
        self._standing: set[tuple[int, str]] = set()
        """The rows of the part of the file that was read last."""

    def new_rows(self, table: ObservationTable, new_from: int = 0) -> ObservationTable:
        """Return the rows not taken before, in the order of the file, and know them from now on.

        Parameters
        ----------
        new_from
            Position from which the rows are known to be new, all those before it having been given at the last call.
        """
        self._recall_for(table)
        if new_from and not self._knows_much():
            table = table.take(np.flatnonzero(table.position >= new_from))
            rows = _rows_of(table)
        else:
            rows = _rows_of(table)
            self._standing = set(rows)
        last = dict(rows)
        # Few rows of many are new: only those, and others of their times, are looked at one by one.
        touched = {time_us for time_us, _ in (*(set(rows) - self._known), *(last.items() - self._last.items()))}
        places = [place for place, (time_us, _) in enumerate(rows) if time_us in touched] if touched else []
        last_place = {rows[place][0]: place for place in places}
        fresh: list[int] = []
        for place in places:
            time_us, text = rows[place]
            known = (time_us, text) in self._known
            counts_again = time_us != NO_TIME_US and last_place[time_us] == place and self._last.get(time_us) != text
            if known and not counts_again:
                continue
            self._know(time_us, text)
            fresh.append(place)
        if len(self._known) > _MOST_KNOWN:
            # What no longer stands in the part of the file that is read cannot come again.
            self._known = set(rows)
            self._last = last
        return table.take(np.array(fresh, dtype=np.int64))

    def forget_recorded(self) -> None:
        """Let go of rows older than the part of the file that is read, so that no row is kept in memory for ever.

        Only for when all rows given out are recorded: where the file is read further back again, they are recalled.
        """
        if self._recalled_from_us is None or not self._knows_much():
            return
        first_us = min((time_us for time_us, _ in self._standing if time_us != NO_TIME_US), default=None)
        if first_us is None:
            return
        self._known = {row for row in self._known if row[0] >= first_us} | self._standing
        self._last = {time_us: text for time_us, text in self._last.items() if time_us >= first_us}
        self._recalled_from_us = first_us

    def _knows_much(self) -> bool:
        """Whether far more rows are known than stood in the part of the file when it was last looked at as a whole."""
        return len(self._known) > 2 * len(self._standing) + _SLACK

    def _know(self, time_us: int, text: str) -> None:
        self._known.add((time_us, text))
        self._last[time_us] = text

    def _recall_for(self, table: ObservationTable) -> None:
        timed = table.time_us[table.time_us != NO_TIME_US]
        first_us = int(timed.min()) if len(timed) else 0
        until_us = END_US if self._recalled_from_us is None else self._recalled_from_us
        if first_us >= until_us:
            return
        recalled = list(self._recall(first_us, until_us))
        self._known.update(recalled)
        # What has been taken since stands behind what was recorded before.
        self._last = dict(recalled) | self._last
        self._recalled_from_us = first_us


def _rows_of(table: ObservationTable) -> list[tuple[int, str]]:
    return list(zip(table.time_us.tolist(), table.raw, strict=True))
