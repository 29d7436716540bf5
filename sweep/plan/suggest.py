"""Did you mean: the known name that is nearest to an unknown one."""

from __future__ import annotations

from collections.abc import Iterable, Set
from difflib import get_close_matches

__all__ = ["suggestion"]


def suggestion(word: str, known: Iterable[str], *, list_all: int = 12) -> str:
    """Return words to append to a fault about an unknown name.

    Parameters
    ----------
    word : str
        What was written.
    known : iterable of str
        What would have been understood; a set is put in order, so that a message is always
        the same.
    list_all : int
        Longest list that is written out when nothing is close.

    Examples
    --------
    >>> suggestion("lag", ["lags", "tests"])
    '; did you mean "lags"?'
    >>> suggestion("zebra", ["lags", "tests"])
    '; known: lags, tests'
    """
    names = sorted(known) if isinstance(known, Set) else list(dict.fromkeys(known))
    close = get_close_matches(word, names, n=1, cutoff=0.6)
    if not close:
        lowered = {name.lower(): name for name in names}
        close = [lowered[word.lower()]] if word.lower() in lowered else []
    if close:
        return f'; did you mean "{close[0]}"?'
    return f"; known: {', '.join(names)}" if 0 < len(names) <= list_all else ""
