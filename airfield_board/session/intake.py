"""Which rows of a file that is read again and again are new."""

from collections.abc import Callable, Collection

import numpy as np

from airfield_board.observations.observation import NO_TIME_US, ObservationTable

_MOST_KNOWN = 200_000


class Intake:
    """Knows the rows that have been taken, by their text as it stood in the file.

    Parameters
    ----------
    recall
        From a stretch of time, [from, until) in microseconds: the texts of the rows recorded of it before.
    """

    def __init__(self, recall: Callable[[int, int], Collection[str]]) -> None:
        self._recall = recall
        self._recalled_from_us: int | None = None
        self._known: set[str] = set()

    def new_rows(self, table: ObservationTable) -> ObservationTable:
        """Return the rows not seen before, in the order of the file, and know them from now on."""
        self._recall_for(table)
        texts = [table.raw[row] for row in range(len(table))]
        fresh: list[int] = []
        for row, text in enumerate(texts):
            if text not in self._known:
                self._known.add(text)
                fresh.append(row)
        if len(self._known) > _MOST_KNOWN:
            # What no longer stands in the part of the file that is read cannot come again.
            self._known = set(texts)
        return table.take(np.array(fresh, dtype=np.int64))

    def _recall_for(self, table: ObservationTable) -> None:
        timed = table.time_us[table.time_us != NO_TIME_US]
        first_us = int(timed.min()) if len(timed) else 0
        if self._recalled_from_us is None:
            self._known.update(self._recall(first_us, _END_US))
        elif first_us < self._recalled_from_us:
            self._known.update(self._recall(first_us, self._recalled_from_us))
        else:
            return
        self._recalled_from_us = first_us


_END_US = int(np.iinfo(np.int64).max)
