"""Which changes away from the baseline turn the finding, and how few of them are needed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from .words import counted, joined, missing, p_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "TWO_WAY",
    "change_words",
    "pair_sentence",
    "path_sentence",
    "positions",
    "single_sentence",
    "step_words",
    "turned",
    "turned_by",
]

# Claims that look at both directions.
TWO_WAY = ("leads one way", "leads both ways")


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


def positions(row: Any) -> str:
    """Count the positions of a moving window that are judged, and say if others are not.

    Examples
    --------
    >>> positions({"admissible": 31, "positions": 31})
    '31 positions'
    >>> positions({"admissible": 9, "positions": 31})
    '9 admissible positions'
    """
    judged = int(row["admissible"])
    return counted(judged, "position" if judged == int(row["positions"]) else "admissible position")


def change_words(row: Any) -> str:
    """Write one single change with what it does, e.g. ``test HC3 (p 0.107)``."""
    flips = int(row["flips"])
    where = f"{row['axis']} {row['choice']}"
    if int(row["positions"]) > 1:
        return f"{where} ({flips:,} of {positions(row)}; median p {p_text(row['p_value'])})"
    return f"{where} (p {p_text(row['p_value'])})"


def single_sentence(
    single_changes: pd.DataFrame, baseline_survives: Any, limit: int = 5, design: str = "full"
) -> str:
    """Say how many single changes turn the finding, and which move it most.

    Parameters
    ----------
    single_changes : DataFrame
        The store's frame of that name.
    baseline_survives : bool or None
        Whether the finding holds at the baseline; None if the baseline is not admissible.
    limit : int
        Most changes to name.
    design : str
        The sweep's design; a sample can only speak of the rows drawn.
    """
    if missing(baseline_survives):
        return "The baseline is not admissible, so no change can turn it."
    if single_changes.empty:
        which = "row drawn" if _is_drawn(design) else "choice"
        return f"No {which} differs from the baseline on one axis only."
    tried = single_changes[single_changes["admissible"].fillna(0).astype(int) > 0]
    if tried.empty:
        where = " in the rows drawn" if _is_drawn(design) else ""
        return (
            f"No single change away from the baseline gives an admissible specification{where}."
        )
    rows = turned(tried)
    verb = "break" if baseline_survives else "restore"
    if rows.empty:
        keeps = "holds" if baseline_survives else "still does not hold"
        each = "the" if len(tried) == 1 else "each of"
        drawn = "was drawn and " if len(tried) == 1 else "were drawn and "
        return (
            f"After {each} {counted(len(tried), 'single change')} that "
            f"{drawn if _is_drawn(design) else ''}could be run, "
            f"the finding {keeps}."
        )
    named = joined(change_words(row) for _, row in rows.head(limit).iterrows())
    more = f", and {len(rows) - limit:,} more" if len(rows) > limit else ""
    verbs = f"{verb}s" if len(rows) == 1 else verb
    moving = " (moving windows: in at least one position)" if (rows["positions"] > 1).any() else ""
    start = "In the rows drawn, " if _is_drawn(design) else ""
    return (
        f"{start}{len(rows):,} of {counted(len(tried), 'single change')} {verbs} the "
        f"finding{moving}: {named}{more}."
    )


def _is_drawn(design: str) -> bool:
    """Say whether the rows of a sweep are a sample of its plan."""
    return design.startswith("sample")


def turned_by(row: Any, claim: str) -> str:
    """Say which part of a claim made rows turn: a direction, or the sign of the sum.

    Parameters
    ----------
    row : mapping
        A row of the store's ``single_changes`` or ``flips`` with its counts
        ``flips_forward, flips_reverse, flips_sign``.
    claim : str
        The claim's kind; one that looks at one direction need not say which.

    Examples
    --------
    >>> row = {"flips": 3, "flips_forward": 3, "flips_reverse": 1, "flips_sign": 0}
    >>> turned_by(row, "leads one way"), turned_by(row, "leads")
    ('cause to effect and reverse', 'cause to effect')
    >>> turned_by({"flips": 0}, "leads")
    ''
    """
    if not int(row["flips"]):
        return ""
    parts = [("cause to effect", "flips_forward"), ("sign of the sum", "flips_sign")]
    if claim in TWO_WAY:
        parts.insert(1, ("reverse", "flips_reverse"))
    return joined(words for words, name in parts if int(row[name]))


def step_words(row: Any, which: str) -> str:
    """Write one changed choice of a row of ``flips``, e.g. ``lags: 4 → 8``; empty without one."""
    if missing(row[f"{which}_axis"]):
        return ""
    return f"{row[f'{which}_axis']}: {row[f'{which}_from']} → {row[f'{which}_to']}"


def pair_sentence(
    flip_counts: pd.DataFrame, baseline_survives: Any, design: str = "full"
) -> str:
    """Say how many pairs of changes turn the finding, and in how many neither does so alone.

    Parameters
    ----------
    flip_counts : DataFrame
        The store's frame of that name.
    baseline_survives : bool or None
        Whether the finding holds at the baseline; None if the baseline is not admissible.
    design : str
        The sweep's design; a sample can only speak of the rows drawn.
    """
    pairs = flip_counts[flip_counts["changes"] == 2]
    if missing(baseline_survives) or pairs.empty or not int(pairs["admissible"].iloc[0]):
        return ""
    counts = {str(name): int(value) for name, value in pairs.iloc[0].items()}
    verb = "break" if baseline_survives else "restore"
    tried, turning, joint = counts["admissible"], counts["turning"], counts["joint"]
    where = "In the rows drawn, " if _is_drawn(design) else ""
    start = f"{where}{turning:,} of {counted(tried, 'pair')} of changes {verb} the finding"
    if turning == 1:
        start = f"{where}1 of {counted(tried, 'pair')} of changes {verb}s the finding"
    if not turning and tried == 1:
        the = f"{where}the" if where else "The"
        return f"{the} 1 pair of changes that could be run does not {verb} the finding."
    if not turning:
        none = "none" if where else "None"
        return f"{where}{none} of {counted(tried, 'pair')} of changes {verb}s the finding."
    if not joint:
        return f"{start}; in each of them a single change does so alone, or could not be judged."
    part = f"in {joint:,} of them, " if joint < turning else "in all of them, "
    return f"{start}; {part if turning > 1 else ''}neither change does so alone."


def path_sentence(
    shortest_flips: pd.DataFrame, baseline_survives: Any, design: str = "full"
) -> str:
    """Say how few changed choices turn the finding, with the nearest example.

    Parameters
    ----------
    shortest_flips : DataFrame
        The store's frame of that name.
    baseline_survives : bool or None
        Whether the finding holds at the baseline; None if the baseline is not admissible.
    design : str
        The sweep's design; a sample can only speak of the rows drawn.
    """
    if missing(baseline_survives):
        return ""
    if shortest_flips.empty:
        which = "row drawn" if _is_drawn(design) else "specification of this sweep"
        becomes = "stop holding" if baseline_survives else "come to hold"
        return f"In no {which} does the finding {becomes}."
    state = "stops holding" if baseline_survives else "comes to hold"
    first = shortest_flips.iloc[0]
    p_value = p_text(first["p_value"])
    found = f"p {p_value}"
    if int(first["positions"]) > 1:
        found = f"{int(first['flips']):,} of {positions(first)}; median {found}"
    start, more = "The finding", ""
    if _is_drawn(design):
        start = "In the rows drawn, the finding"
        more = " Rows that were not drawn may need fewer." if first["changes"] > 1 else ""
    return (
        f"{start} {state} after {counted(int(first['changes']), 'changed choice')} at the "
        f"fewest: {first['changed']} ({found}).{more}"
    )
