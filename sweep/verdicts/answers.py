"""What a referee asked and what came out, in sentences."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from .flips import positions
from .words import counted, missing, p_text, percent, reason_text, share_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["answer_sentences", "answer_words", "request_name"]

# More answers than this are left to the table.
_NAMED = 6


def request_name(row: Any) -> str:
    """Return who asks and the name of the request.

    Examples
    --------
    >>> request_name({"asked_by": "Referee 2", "request_name": "comment 4"})
    'Referee 2, comment 4'
    """
    return ", ".join(str(row[key]) for key in ("asked_by", "request_name") if row[key])


def answer_words(row: Any) -> str:
    """Say what one change that a request asks for gives.

    Examples
    --------
    >>> row = {"changed": "lags 12", "positions": 1, "admissible": 1, "survived": 0,
    ...        "p_value": 0.0853, "status": "ok", "reason": ""}
    >>> answer_words(row)
    'with lags 12 it does not hold (p 0.085)'
    """
    where = f"with {row['changed']}"
    rows, kept = int(row["admissible"]), int(row["survived"])
    if not rows:
        return f"{where} nothing can be said ({reason_text(row['status'], row['reason'])})"
    if int(row["positions"]) > 1:
        return (
            f"{where} it holds in {kept:,} of {positions(row)} (median p "
            f"{p_text(row['p_value'])})"
        )
    return f"{where} it {'holds' if kept else 'does not hold'} (p {p_text(row['p_value'])})"


def _baseline_words(answers: pd.DataFrame) -> str:
    first = answers.iloc[0]
    if missing(first["baseline_survives"]):
        return "The baseline is not admissible"
    state = "holds" if first["baseline_survives"] else "does not hold"
    return f"At the baseline the finding {state} (p {p_text(first['baseline_p_value'])})"


def answer_sentences(requests: pd.DataFrame, answers: pd.DataFrame) -> list[str]:
    """Answer each request that concerns a finding, in plan order.

    Parameters
    ----------
    requests, answers : DataFrame
        The store's frames of those names.

    Returns
    -------
    list of str
        One paragraph a request; empty where nobody asked.
    """
    said = []
    for row in requests[requests["concerned"].astype(bool)].to_dict("records"):
        asks = f" asks: “{row['asks']}”" if row["asks"] else "."
        own = answers[answers["request"] == row["request"]]
        parts = [f"{request_name(row)}{asks}"]
        if own.empty:
            parts.append("It names the baseline's own choices only.")
        else:
            words = [answer_words(one) for one in own.head(_NAMED).to_dict("records")]
            more = f"; and {len(own) - _NAMED:,} more in the table" if len(own) > _NAMED else ""
            parts.append(f"{_baseline_words(own)}; {'; '.join(words)}{more}.")
        parts.append(_added_words(row))
        said.append(" ".join(parts))
    return said


def _added_words(row: Any) -> str:
    """Say how many rows a request added to the sweep and in how many of them it survives."""
    if not int(row["added"]):
        return "It adds no row: all that it asks was planned or had been added."
    added, admissible = int(row["added"]), int(row["admissible"])
    counts = f"It adds {counted(added, 'row')} to the sweep, {admissible:,} admissible"
    if not admissible:
        return f"{counts}. They leave the headline as it is."
    share = share_text(int(row["survived"]), admissible)
    weighted = ""
    if not missing(row["weighted_share"]):
        weighted = f"; weighted {percent(row['weighted_share'])}"
    return (
        f"{counts}; the finding survives in {share}{weighted}. They leave the headline as it is."
    )
