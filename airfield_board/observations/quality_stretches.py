"""Whole stretches of ordinary rows at once, so that a long record is checked at the speed of arrays.

A row is ordinary where nothing that the checks look for can happen at it: it is then valid, neither late nor a
correction, the first after no gap, and compared with the row just before it, which is valid too. What is not
certainly ordinary is left to `airfield_board.observations.quality_judgement`, which alone knows the rules; so the
bounds here may be narrower than the checks', never wider.
"""

import numpy as np
from numpy.typing import NDArray

from airfield_board.observations.observation import DewpointUse, ObservationTable
from airfield_board.observations.quality_judgement import (
    ALTIMETER_STEP_HPA,
    DEWPOINT_EXCESS_C,
    DEWPOINT_STEP_C,
    ELEVATION_DIFFERENCE_M,
    FUTURE_US,
    HIGHEST_ALTIMETER_HPA,
    HIGHEST_DEWPOINT_C,
    HIGHEST_TEMPERATURE_C,
    LOWEST_ALTIMETER_HPA,
    LOWEST_DEWPOINT_C,
    LOWEST_TEMPERATURE_C,
    STUCK_WARNING_US,
    TEMPERATURE_STEP_C,
    QualityRules,
)
from airfield_board.observations.quality_memory import LONGEST_GAP_US, Dewpoint, Past, Reading
from airfield_board.units import DAY_US

Places = NDArray[np.int64]
Flags = NDArray[np.bool_]


class Stretches:
    """Finds stretches of ordinary rows in a table and takes them.

    Parameters
    ----------
    rows
        Sorted by time.
    start
        The first row to look at; no row from it on is without a time.
    rules, now_us
        As for the checks.
    """

    def __init__(self, rows: ObservationTable, start: int, rules: QualityRules, now_us: int) -> None:
        self._rows = rows
        self._auto = rules.humidity == "auto"
        self._humid = rules.humidity != "dry"
        count = len(rows)
        part = slice(start, count)
        time_us, altimeter_hpa, temperature_c = rows.time_us[part], rows.altimeter_hpa[part], rows.temperature_c[part]
        dewpoint_c = rows.dewpoint_c[part]
        odd = _unusable(rows, part, rules, now_us)
        odd[[row - start for row in rows.faults if row >= start]] = True
        gap_us = np.diff(time_us)
        odd[1:] |= (gap_us == 0) | (gap_us > LONGEST_GAP_US)
        odd[:-1] |= gap_us == 0
        has_dewpoint = ~np.isnan(dewpoint_c)
        places_with_dewpoint = np.flatnonzero(has_dewpoint)
        changed = np.ones(len(time_us), dtype=np.bool_)
        with np.errstate(invalid="ignore"):
            # The greatest ordinary change grows with the interval, so a change within that of 5 min is one always.
            odd[1:] |= np.abs(np.diff(altimeter_hpa)) > ALTIMETER_STEP_HPA
            odd[1:] |= np.abs(np.diff(temperature_c)) > TEMPERATURE_STEP_C
            dewpoint_steps = np.abs(np.diff(dewpoint_c[places_with_dewpoint])) > DEWPOINT_STEP_C
        odd[places_with_dewpoint[1:][dewpoint_steps]] = True
        changed[1:] = (altimeter_hpa[1:] != altimeter_hpa[:-1]) | (temperature_c[1:] != temperature_c[:-1])
        odd |= time_us - time_us[_latest(changed)] >= STUCK_WARNING_US
        self._odd = start + np.flatnonzero(odd)
        self._changed = start + np.flatnonzero(changed)
        self._with_dewpoint = start + places_with_dewpoint
        self._silent = start + np.flatnonzero(_silent(time_us, has_dewpoint))

    def end(self, first: int, past: Past) -> int:
        """Return the end of the ordinary stretch that begins at a row.

        Parameters
        ----------
        first
            The row; the one before it is the last valid observation, and no suspect one waits.
        past
            Of the rows before.

        Returns
        -------
        int
            The first row that is not ordinary for certain; ``first`` where that is the row itself.
        """
        end = self._next(self._odd, first)
        if end == first:
            return end
        dewpoint = self._next(self._with_dewpoint, first)
        if self._humid and past.first_dewpoint_us is None:
            end = min(end, dewpoint if self._auto else first)
        elif self._humid:
            end = min(end, self._next(self._silent, first))
            silent = self._end_of_carrying(past)
            if silent < dewpoint:
                end = min(end, silent)
        last = past.last_dewpoint
        if dewpoint < end and last and abs(self._rows.dewpoint_c[dewpoint] - last.dewpoint_c) > DEWPOINT_STEP_C:
            end = dewpoint
        warning = int(self._rows.time_us.searchsorted(past.same_since_us + STUCK_WARNING_US))
        if warning < self._next(self._changed, first):
            end = min(end, warning)
        return max(first, end)

    def take(self, first: int, end: int, past: Past) -> tuple[NDArray[np.float64], NDArray[np.int8], Past]:
        """Take rows of an ordinary stretch as valid.

        Parameters
        ----------
        first, end
            The first row, and the one after the last.
        past
            Of the rows before.

        Returns
        -------
        dewpoint_used_c
            The dew point that counts for each; NaN where humidity does not.
        dewpoint_use
            A `DewpointUse` each.
        past
            With the rows.
        """
        rows = self._rows
        dewpoint_c = rows.dewpoint_c[first:end]
        used_c = np.full(end - first, np.nan)
        use = np.full(end - first, int(DewpointUse.DRY), dtype=np.int8)
        if self._humid and past.first_dewpoint_us is not None:
            used_c[:] = dewpoint_c
            use[:] = DewpointUse.OBSERVED
            missing = np.isnan(dewpoint_c)
            if missing.any():
                carried_c = past.carried_c(int(rows.time_us[first]))
                known_c = np.concatenate(([np.nan if carried_c is None else carried_c], dewpoint_c))
                known_c = known_c[_latest(~np.isnan(known_c))][1:]
                used_c[missing] = np.minimum(known_c, rows.temperature_c[first:end])[missing]
                use[missing] = DewpointUse.CARRIED
        return used_c, use, self._past_after(first, end, past)

    def _past_after(self, first: int, end: int, past: Past) -> Past:
        rows = self._rows
        last = end - 1
        last_us = int(rows.time_us[last])
        dewpoint_c = float(rows.dewpoint_c[last])
        last_change = int(self._changed[self._changed.searchsorted(last, side="right") - 1])
        observed = self._with_dewpoint[
            self._with_dewpoint.searchsorted(first) : self._with_dewpoint.searchsorted(last, side="right")
        ]
        last_dewpoint, first_dewpoint_us = past.last_dewpoint, past.first_dewpoint_us
        if observed.size:
            last_dewpoint = self._dewpoint(observed[-1])
            if first_dewpoint_us is None:
                first_dewpoint_us = int(rows.time_us[observed[0]])
        return Past(
            last_valid=Reading(
                last_us,
                float(rows.altimeter_hpa[last]),
                float(rows.temperature_c[last]),
                None if np.isnan(dewpoint_c) else dewpoint_c,
            ),
            same_since_us=past.same_since_us if last_change < first else int(rows.time_us[last_change]),
            same_last_us=last_us,
            suspect=None,
            last_dewpoint=last_dewpoint,
            first_dewpoint_us=first_dewpoint_us,
            highest_dewpoints=self._highest_after(observed, last_us - DAY_US, past),
        )

    def _highest_after(self, observed: Places, since_us: int, past: Past) -> tuple[Dewpoint, ...]:
        """Return the dew points since a time that no later one reaches, those of some rows after those of the past."""
        earlier = tuple(entry for entry in past.highest_dewpoints if entry.time_us >= since_us)
        observed = observed[self._rows.time_us[observed] >= since_us]
        if not observed.size:
            return earlier
        backward_c = self._rows.dewpoint_c[observed][::-1]
        highest_c = np.maximum.accumulate(backward_c)
        unreached = np.concatenate(([True], backward_c[1:] > highest_c[:-1]))[::-1]
        return (
            *(entry for entry in earlier if entry.dewpoint_c > highest_c[-1]),
            *(self._dewpoint(place) for place in observed[unreached]),
        )

    def _dewpoint(self, place: np.int64) -> Dewpoint:
        return Dewpoint(int(self._rows.time_us[place]), float(self._rows.dewpoint_c[place]))

    def _next(self, places: Places, first: int) -> int:
        index = int(places.searchsorted(first))
        return int(places[index]) if index < len(places) else len(self._rows)

    def _end_of_carrying(self, past: Past) -> int:
        """First row to which the last observed dew point can no longer be carried."""
        if past.last_dewpoint is None:
            return 0
        return int(self._rows.time_us.searchsorted(past.last_dewpoint.time_us + LONGEST_GAP_US, side="right"))


def _unusable(rows: ObservationTable, part: slice, rules: QualityRules, now_us: int) -> Flags:
    """Flag the rows that one of the first four checks may reject."""
    altimeter_hpa, temperature_c, dewpoint_c = rows.altimeter_hpa[part], rows.temperature_c[part], rows.dewpoint_c[part]
    # The negation catches NaN.
    odd: Flags = ~(
        (altimeter_hpa >= LOWEST_ALTIMETER_HPA)
        & (altimeter_hpa <= HIGHEST_ALTIMETER_HPA)
        & (temperature_c >= LOWEST_TEMPERATURE_C)
        & (temperature_c <= HIGHEST_TEMPERATURE_C)
    )
    odd |= (dewpoint_c < LOWEST_DEWPOINT_C) | (dewpoint_c > HIGHEST_DEWPOINT_C)
    with np.errstate(invalid="ignore"):
        odd |= dewpoint_c - temperature_c > DEWPOINT_EXCESS_C
        odd |= np.abs(rows.elevation_m[part] - rules.elevation_m) > ELEVATION_DIFFERENCE_M
    odd |= rows.time_us[part] > now_us + FUTURE_US
    return odd


def _latest(flags: Flags) -> Places:
    """Return for each place the latest flagged one up to it; 0 before the first."""
    places = np.arange(len(flags))
    places[~flags] = 0
    return np.maximum.accumulate(places)


def _silent(time_us: NDArray[np.int64], has_dewpoint: Flags) -> Flags:
    """Flag the rows without a dew point and with none in the table at most 3 h before."""
    if has_dewpoint.all():
        return ~has_dewpoint
    latest = _latest(has_dewpoint)
    return ~has_dewpoint & (~has_dewpoint[latest] | (time_us - time_us[latest] > LONGEST_GAP_US))
