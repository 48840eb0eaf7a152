"""A changed fleet against the one in force, limit by limit."""

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace
from datetime import date

from airfield_board.configuration.looseness import Aspect, merge_limits
from airfield_board.configuration.model import Aircraft, Fleet, Limit, Operation, Quantity
from airfield_board.configuration.setting_changes import ChangeNotes
from airfield_board.configuration.setting_texts import NONE, TAKEN_OUT, aspect_text


def merge_fleets(
    old: Fleet, new: Fleet, notes: ChangeNotes, *, acceptance_told: bool, guarded_waits: bool, today: date | None
) -> Fleet:
    """Return the fleet that holds.

    Parameters
    ----------
    old, new
        In force, and as read.
    notes
        Takes down what waits and what acts.
    acceptance_told
        The profile's acceptance has changed and is noted already: nothing is noted of that of single limits.
    guarded_waits
        The profile no longer asks for guarded acceptance, and that waits: new limits are guarded meanwhile.
    today
        The airfield's local day; None: all days count alike.

    Returns
    -------
    Fleet
        The new one; what it loosens or leaves out is as in the old one. Names, groups, phases, sources and notices act
        as they are read.
    """
    return _FleetMerge(
        old, new, notes, acceptance_told=acceptance_told, guarded_waits=guarded_waits, today=today
    ).fleet()


class _FleetMerge:
    def __init__(
        self,
        old: Fleet,
        new: Fleet,
        notes: ChangeNotes,
        *,
        acceptance_told: bool,
        guarded_waits: bool,
        today: date | None,
    ) -> None:
        self._old = old
        self._new = new
        self._notes = notes
        self._acceptance_told = acceptance_told
        self._guarded_waits = guarded_waits
        self._today = today
        used = Counter(name for name, _ in {(each.name, each.id) for each in (*old.aircraft, *new.aircraft)})
        self._ambiguous = {name for name, times in used.items() if times > 1}

    def fleet(self) -> Fleet:
        """Merge all of it."""
        before = {aircraft.id: aircraft for aircraft in self._old.aircraft}
        after = {aircraft.id: aircraft for aircraft in self._new.aircraft}
        merged = [self._aircraft(before.get(aircraft.id), aircraft) for aircraft in self._new.aircraft]
        for aircraft in self._old.aircraft:
            if aircraft.id in after:
                continue
            kept = tuple(each for each in aircraft.operations if self._counts(each.limits))
            if kept:
                self._notes.waits(self._label(aircraft), "in force", TAKEN_OUT)
                merged.append(replace(aircraft, operations=kept))
        return replace(self._new, aircraft=tuple(merged))

    def _label(self, aircraft: Aircraft) -> str:
        return f"{aircraft.name} ({aircraft.id})" if aircraft.name in self._ambiguous else aircraft.name

    def _counts(self, limits: Iterable[Limit]) -> bool:
        """Whether any of the limits is in force today or later."""
        return any(
            self._today is None or limit.valid_until is None or limit.valid_until >= self._today for limit in limits
        )

    def _aircraft(self, old: Aircraft | None, new: Aircraft) -> Aircraft:
        label = self._label(new)
        if old is None:
            self._notes.acts(label, NONE, "added")
            return replace(new, operations=tuple(self._added(operation) for operation in new.operations))
        before = {operation.name: operation for operation in old.operations}
        after = {operation.name for operation in new.operations}
        merged = [self._operation(label, before.get(operation.name), operation) for operation in new.operations]
        for operation in old.operations:
            if operation.name not in after and self._counts(operation.limits):
                self._notes.waits(f"{label}, {operation.name}", "in force", TAKEN_OUT)
                merged.append(operation)
        return replace(new, operations=tuple(merged))

    def _added(self, operation: Operation) -> Operation:
        return replace(operation, limits=tuple(self._still_guarded(operation.limits)))

    def _still_guarded(self, limits: Iterable[Limit]) -> Iterator[Limit]:
        for limit in limits:
            yield replace(limit, guarded=True) if self._guarded_waits else limit

    def _operation(self, aircraft: str, old: Operation | None, new: Operation) -> Operation:
        label = f"{aircraft}, {new.name}"
        if old is None:
            self._notes.acts(label, NONE, "added")
            return self._added(new)
        merged: list[Limit] = []
        for quantity in dict.fromkeys(limit.quantity for limit in (*new.limits, *old.limits)):
            merged.extend(
                self._quantity(f"{label}: {quantity}", _of_quantity(old, quantity), _of_quantity(new, quantity))
            )
        return replace(new, limits=tuple(merged))

    def _quantity(self, label: str, old: Sequence[Limit], new: Sequence[Limit]) -> Iterable[Limit]:
        if not old:
            self._notes.acts(f"{label}, limit", NONE, aspect_text(new, Aspect.LIMIT))
            return self._still_guarded(new)
        if not new:
            if not self._counts(old):
                return ()
            self._notes.waits(f"{label}, limit", aspect_text(old, Aspect.LIMIT), TAKEN_OUT)
            return old
        merge = merge_limits(old, new, today=self._today)
        for aspect in Aspect:
            if aspect is Aspect.ACCEPTANCE and self._acceptance_told:
                continue
            was, now = aspect_text(old, aspect), aspect_text(new, aspect)
            if aspect in merge.loosened:
                self._notes.waits(f"{label}, {aspect}", was, now)
            elif aspect in merge.tightened:
                self._notes.acts(f"{label}, {aspect}", was, now)
        return merge.effective


def _of_quantity(operation: Operation, quantity: Quantity) -> tuple[Limit, ...]:
    return tuple(limit for limit in operation.limits if limit.quantity is quantity)
