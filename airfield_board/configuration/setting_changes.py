"""Changes of settings, as they are told to a person."""

from collections.abc import Callable
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingChange:
    """A setting that the files loosen, and that waits for acceptance.

    Attributes
    ----------
    where
        What it is a setting of, as a person would say it.
    in_force, waiting
        Short plain texts: what holds until the change is accepted, and what is to come.
    """

    where: str
    in_force: str
    waiting: str


@dataclass(frozen=True, slots=True, kw_only=True)
class TightenedChange:
    """A setting that the files tighten, which acts at once; the attributes are short plain texts."""

    where: str
    was: str
    now: str


@dataclass(slots=True, kw_only=True)
class ChangeNotes:
    """Collects what waits and what acts while settings are merged."""

    waiting: list[SettingChange] = field(default_factory=list)
    tightened: list[TightenedChange] = field(default_factory=list)

    def waits(self, where: str, in_force: str, waiting: str) -> None:
        """Note a loosened setting."""
        self.waiting.append(SettingChange(where=where, in_force=in_force, waiting=waiting))

    def acts(self, where: str, was: str, now: str) -> None:
        """Note a tightened setting."""
        self.tightened.append(TightenedChange(where=where, was=was, now=now))

    def number(self, where: str, old: float, new: float, *, text: Callable[[float], str], tighter: str) -> float:
        """Return which of two numbers holds, and note the change.

        Parameters
        ----------
        where
            What they are.
        old, new
            In force and read; a difference of rounding is none.
        text
            Words for one of them.
        tighter
            ``greater`` or ``less``: which way is the safe one.
        """
        if abs(new - old) <= _ROUNDING * max(abs(new), abs(old)):
            return new
        if (new > old) == (tighter == "greater"):
            self.acts(where, text(old), text(new))
            return new
        self.waits(where, text(old), text(new))
        return old

    def word(self, where: str, old: str, new: str, *, is_looser: bool) -> bool:
        """Note a change of a word, if it is one, and return whether it waits."""
        if old == new:
            return False
        (self.waits if is_looser else self.acts)(where, old, new)
        return is_looser


_ROUNDING = 1e-9
