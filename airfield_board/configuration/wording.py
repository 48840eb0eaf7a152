"""Words for what is wrong in a settings file: suggestions for what is misspelt, and lists."""

import difflib
from collections.abc import Iterable

_LONGEST = 60


def suggestion(written: str, known: Iterable[str]) -> str:
    """Return the known word that a misspelt one was most likely meant to be.

    Parameters
    ----------
    written
        As the file has it.
    known
        What would be right.

    Returns
    -------
    str
        Empty where nothing is near.
    """
    if len(written) > _LONGEST:
        return ""
    by_folded = {word.casefold(): word for word in known}
    near = difflib.get_close_matches(written.strip().casefold().replace("-", "_"), by_folded, n=1, cutoff=0.6)
    near = near or difflib.get_close_matches(written.strip().casefold(), by_folded, n=1, cutoff=0.6)
    return by_folded[near[0]] if near else ""


def listed(words: Iterable[str]) -> str:
    """Return words as a sentence has them: ``a, b or c``."""
    *first, last = words
    return f"{', '.join(first)} or {last}" if first else last
