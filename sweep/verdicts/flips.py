"""Which changes away from the baseline turn the finding, and how few of them are needed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from .words import counted, joined, missing, p_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["change_words", "path_sentence", "single_sentence", "turned"]


def turned(single_changes: pd.DataFrame) -> pd.DataFrame:
    """Return the single changes under which at least one row turns, largest move first.

    Parameters
    ----------
    single_changes : DataFrame
        The store's frame of that name: one row a choice that differs from the baseline's.
    """
    rows = single_changes[single_changes["flips"].fillna(0).astype(int) > 0]
    order = rows["z_change"].astype(float).abs().sort_values(ascending=False).index
    return rows.loc[order]


def change_words(row: Any) -> str:
    """Write one single change with what it does, e.g. ``test HC3 (p 0.107)``."""
    flips, rows = int(row["flips"]), int(row["admissible"])
    where = f"{row['axis']} {row['choice']}"
    if rows > 1:
        return f"{where} ({flips:,} of {rows:,} positions; median p {p_text(row['p_value'])})"
    return f"{where} (p {p_text(row['p_value'])})"


def single_sentence(single_changes: pd.DataFrame, baseline_survives: Any, limit: int = 5) -> str:
    """Say how many single changes turn the finding, and which move it most.

    Parameters
    ----------
    single_changes : DataFrame
        The store's frame of that name.
    baseline_survives : bool or None
        Whether the finding holds at the baseline; None if the baseline is not admissible.
    limit : int
        Most changes to name.
    """
    if missing(baseline_survives):
        return "The baseline is not admissible, so no change can turn it."
    if single_changes.empty:
        return "No choice differs from the baseline on one axis only."
    tried = single_changes[single_changes["admissible"].fillna(0).astype(int) > 0]
    if tried.empty:
        return "No single change away from the baseline gives an admissible specification."
    rows = turned(tried)
    verb = "break" if baseline_survives else "restore"
    if rows.empty:
        keeps = "holds" if baseline_survives else "still does not hold"
        return (
            f"After each of {counted(len(tried), 'single change')} that could be run, "
            f"the finding {keeps}."
        )
    named = joined(change_words(row) for _, row in rows.head(limit).iterrows())
    more = f", and {len(rows) - limit:,} more" if len(rows) > limit else ""
    verbs = f"{verb}s" if len(rows) == 1 else verb
    moving = " (moving windows: in at least one position)" if (rows["positions"] > 1).any() else ""
    return (
        f"{len(rows):,} of {counted(len(tried), 'single change')} {verbs} the finding{moving}: "
        f"{named}{more}."
    )


def path_sentence(shortest_flips: pd.DataFrame, baseline_survives: Any) -> str:
    """Say how few changed choices turn the finding, with the nearest example."""
    if missing(baseline_survives):
        return ""
    state = "stops holding" if baseline_survives else "comes to hold"
    if shortest_flips.empty:
        return f"In no specification of this sweep the finding {state}."
    first = shortest_flips.iloc[0]
    return (
        f"The finding {state} after {counted(int(first['changes']), 'changed choice')} at the "
        f"fewest: {first['changed']} (p {p_text(first['p_value'])})."
    )
