"""Proving a history: the chain, and on demand every judgement anew."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from airfield_board import __version__
from airfield_board.history.records import RecordKind
from airfield_board.history.store import History
from airfield_board.history.verify import verify
from airfield_board.session.rejudge import judge_anew

_WHAT_IT_PROVES = (
    "It proves that nothing was changed, dropped, added or reordered since the hashes were made; somebody who rewrites "
    "the whole file and its second place is caught only by a closing hash printed or kept elsewhere."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Findings:
    """What was found.

    Attributes
    ----------
    whole
        Whether everything fits.
    lines
        In plain words.
    """

    whole: bool
    lines: tuple[str, ...]


def verify_history(
    path: Path, *, closing_hash: str | None, rejudge: bool, progress: Callable[[int], None] | None = None
) -> Findings:
    """Prove a history.

    Parameters
    ----------
    closing_hash
        Printed or kept elsewhere; None: there is none.
    rejudge
        Whether every logged observation is judged anew.
    progress
        Told how many records are done.

    Raises
    ------
    UserError
        Where it cannot be read, or is no history.
    """
    found = verify(path, closing_hash, None if progress is None else lambda done, _: progress(done))
    lines = [fault.message for fault in found.faults]
    lines += [f"Note: {note}" for note in found.notes]
    if found.ok:
        lines.append(f"{path}: whole and unaltered, {found.records:,} records.")
        lines.append(f"Closing hash: {found.head_hash or 'none'}")
    else:
        lines.append(f"{path}: NOT as it was recorded; {found.records:,} records fit.")
    if closing_hash is not None and found.closing_record is not None:
        lines.append(f"The given closing hash is that of record {found.closing_record:,}: up to there nothing changed.")
    lines.append(_WHAT_IT_PROVES)
    if not rejudge:
        return Findings(whole=found.ok, lines=tuple(lines))
    if not found.ok:
        return Findings(whole=False, lines=(*lines, "Not judged anew: the record itself does not hold."))
    anew = _anew(path, progress)
    return Findings(whole=anew.whole, lines=(*lines, *anew.lines))


def _anew(path: Path, progress: Callable[[int], None] | None) -> Findings:
    history = History.open_read_only(path)
    try:
        start = history.newest(RecordKind.START)
        anew = judge_anew(history.records(), progress)
    finally:
        history.close()
    version = "" if start is None else str(start.body.get("program_version", ""))
    lines = [f"Judged anew: {anew.observations:,} observations and {anew.changes:,} changes of limits compared."]
    if anew.differences and version != __version__:
        lines.append(
            f"The history was last written by version {version}; this is {__version__}, whose rules may differ."
        )
    lines += [f"Record {difference.seq}: {difference.text}." for difference in anew.differences]
    return Findings(whole=not anew.differences, lines=tuple(lines))
