"""How often a finding survives, in counts and in sentences.

The headline of a full sweep is Σ w·survived / Σ w·admissible over planned rows, with
w = 1/(positions of the window entry) × 1/(size of the test group).  It is always written
beside its counts.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from statistics import NormalDist
from typing import TYPE_CHECKING, Any

from .words import counted, joined, level_text, missing, percent

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "OVERALL",
    "Counts",
    "axis_sentences",
    "counts_of",
    "headline",
    "levels_sentence",
    "losses_sentence",
    "overall",
    "sampling_interval",
]

OVERALL = "all"

# Steps below which a range over choices is not worth a sentence of its own.
_FLAT = 1e-12


@dataclass(frozen=True, slots=True)
class Counts:
    """The counts of one finding, or of one choice of it.

    Attributes
    ----------
    planned, not_applicable, infeasible, failed, screened_out, admissible, survived : int
        Rows; planned = not applicable + infeasible + failed + screened out + not run +
        admissible.
    other_sign : int
        Rows that reject at the level but with the sign that was not claimed.
    distinct : int
        Distinct computations among the admissible rows.
    headline : float or None
        Weighted share in [0, 1]; None where nothing is admissible.
    at_1, at_5, at_10 : float or None
        The same share were the level 1%, 5% or 10%.
    median_p : float or None
        Median p-value of the admissible rows.
    not_run : int
        Rows that an unfinished run has not come to.
    """

    planned: int
    not_applicable: int
    infeasible: int
    failed: int
    screened_out: int
    admissible: int
    survived: int
    other_sign: int
    distinct: int
    headline: float | None
    at_1: float | None
    at_5: float | None
    at_10: float | None
    median_p: float | None
    not_run: int = 0

    @property
    def raw(self) -> float | None:
        """Unweighted share of survivors among admissible rows."""
        return self.survived / self.admissible if self.admissible else None

    @property
    def pooled(self) -> bool:
        """Whether rows have weights; where few choices are changed at a time they have none."""
        return self.headline is not None or not self.admissible

    @property
    def shown(self) -> float | None:
        """The share that a figure draws: the weighted one, without weights the unweighted."""
        return self.headline if self.pooled else self.raw

    @property
    def left_out(self) -> int:
        """Planned rows that are not counted in the share."""
        return self.planned - self.admissible


def _whole(value: Any) -> int:
    return 0 if missing(value) else int(value)


def _share(value: Any) -> float | None:
    return None if missing(value) else float(value)


def counts_of(row: Any) -> Counts:
    """Return the counts held by one row of the survival frame.

    Parameters
    ----------
    row : mapping
        A row with the columns of the store's view ``survival``.
    """
    whole = {
        name: _whole(row[name])
        for name in (
            "planned",
            "not_applicable",
            "infeasible",
            "failed",
            "screened_out",
            "admissible",
            "survived",
            "other_sign",
            "distinct",
        )
    }
    return Counts(
        **whole,
        headline=_share(row["headline_share"]),
        at_1=_share(row["share_at_1"]),
        at_5=_share(row["share_at_5"]),
        at_10=_share(row["share_at_10"]),
        median_p=_share(row["median_p_value"]),
        not_run=_whole(row.get("not_run")),
    )


def overall(survival: pd.DataFrame) -> Counts:
    """Return the counts of the whole finding.

    Parameters
    ----------
    survival : DataFrame
        The survival frame of one finding, with its row of axis ``all``.

    Raises
    ------
    ValueError
        If the frame has no overall row, or more than one.
    """
    rows = survival[survival["axis"] == OVERALL]
    if len(rows) != 1:
        raise ValueError(f"the survival frame of one finding has {len(rows)} overall rows, not 1")
    return counts_of(rows.iloc[0])


def headline(counts: Counts, design: str = "full") -> str:
    """Write the headline with its counts, e.g. ``412 of 660 rows (62%); weighted 57%; …``.

    Parameters
    ----------
    counts : Counts
        Counts of the whole finding.
    design : str
        The sweep's design; designs that change a few choices at a time pool nothing.
    """
    if not counts.admissible:
        return f"none of {counts.planned:,} planned rows is admissible"
    computations = counted(counts.distinct, "distinct computation")
    if design.endswith(("change", "changes")):
        return f"{counted(counts.admissible, 'admissible row')}, no pooled share; {computations}"
    rows = f"{counts.survived:,} of {counted(counts.admissible, 'row')} ({percent(counts.raw)})"
    return f"{rows}; weighted {percent(counts.headline)}; {computations}"


def levels_sentence(counts: Counts, significance: float) -> str:
    """Write the weighted share at 1, 5 and 10% (and at the plan's level if it is another)."""
    if not counts.admissible:
        return "There is no share to state at any level."
    parts = [
        f"{percent(share)} at {label}"
        for share, label in ((counts.at_1, "1%"), (counts.at_5, "5%"), (counts.at_10, "10%"))
    ]
    if not any(math.isclose(significance, level) for level in (0.01, 0.05, 0.10)):
        parts.insert(0, f"{percent(counts.headline)} at the plan's {level_text(significance)}")
    return f"By significance level, the weighted share is {joined(parts)}."


def losses_sentence(counts: Counts) -> str:
    """Say what was planned and not counted, with each count."""
    losses = [
        (counts.not_applicable, "not applicable"),
        (counts.infeasible, "infeasible"),
        (counts.failed, "failed"),
        (counts.screened_out, "screened out"),
        (counts.not_run, "not run yet"),
    ]
    parts = [f"{count:,} {name}" for count, name in losses if count]
    if not parts:
        if counts.planned == 1:
            return "The 1 planned row is admissible."
        return f"All {counted(counts.planned, 'planned row')} are admissible."
    verb = "is" if counts.admissible == 1 else "are"
    return (
        f"Of {counted(counts.planned, 'planned row')}, {counts.admissible:,} {verb} admissible; "
        f"left out: {joined(parts)}."
    )


def sampling_interval(strata: pd.DataFrame) -> tuple[float, float] | None:
    """Return a 95% interval of the headline share of a sample that was drawn from the plan.

    The share R is a ratio of two stratified means, Y of w·survived and X of w·admissible, the
    strata being the window entries.  With z = w·admissible·(survived − R) its variance is

        var(R) = Σ_h (1 − n_h/N_h) n_h s²(z)_h / X²

    (Cochran 1977, sections 5.4 and 6.11; w holds 1/n_h), which is zero where every row was
    drawn.  Two surviving and two other rows are added beforehand, spread over the admissible
    rows of what was not drawn whole, so that a share near none or all still has a variance
    (Agresti & Coull 1998).

    Parameters
    ----------
    strata : DataFrame
        The store's frame of that name: rows by window entry and weight.

    Returns
    -------
    tuple of float or None
        Lower and upper end in [0, 1]; None where nothing is admissible.
    """
    rows = strata.astype(dict.fromkeys(("weight", "rows", "admissible", "survived", "size"), float))
    total = float((rows["weight"] * rows["admissible"]).sum())
    if not total > 0:
        return None
    drawn = rows[~rows["is_baseline"]]
    there = drawn.groupby("window_name", observed=True)["rows"].transform("sum")
    # The baseline is one of the rows of its entry, and no draw could take it.
    whole = drawn["size"] - drawn["window_name"].isin(
        rows.loc[rows["is_baseline"], "window_name"]
    )
    left = (1 - there / whole).clip(lower=0.0)
    open_ = drawn["admissible"].where(left > 0, 0.0)
    added = 4 * open_ / max(float(open_.sum()), 1.0)
    smooth = (drawn["survived"] + added / 2) / (drawn["admissible"] + added).where(
        drawn["admissible"] > 0, 1.0
    )
    fixed = rows[rows["is_baseline"]]
    share = float(
        (drawn["weight"] * drawn["admissible"] * smooth).sum()
        + (fixed["weight"] * fixed["survived"]).sum()
    ) / total
    counted_ = drawn["weight"] * drawn["admissible"]
    parts = drawn.assign(
        there=there,
        left=left,
        first=counted_ * (smooth - share),
        second=counted_
        * drawn["weight"]
        * (smooth * (1 - share) ** 2 + (1 - smooth) * share**2),
    )
    variance = 0.0
    for _, part in parts.groupby("window_name", observed=True):
        n, first, second = float(part["there"].iloc[0]), part["first"].sum(), part["second"].sum()
        spread = (second - first**2 / n) / max(n - 1, 1.0)
        variance += float(part["left"].iloc[0]) * n * spread
    reach = NormalDist().inv_cdf(0.975) * math.sqrt(max(variance, 0.0)) / total
    return max(0.0, share - reach), min(1.0, share + reach)


def axis_sentences(survival: pd.DataFrame) -> list[str]:
    """Say, for each axis with several choices, where the weighted share is lowest and highest.

    Designs that change few choices at a time have no weighted share, hence no such sentence.
    """
    sentences = []
    parts = survival[(survival["axis"] != OVERALL) & survival["headline_share"].notna()]
    for axis in parts["axis"].drop_duplicates():
        rows = parts[parts["axis"] == axis]
        if len(rows) < 2:
            continue
        low = rows.loc[rows["headline_share"].astype(float).idxmin()]
        high = rows.loc[rows["headline_share"].astype(float).idxmax()]
        spread = float(high["headline_share"]) - float(low["headline_share"])
        if spread < _FLAT:
            sentences.append(
                f"By {axis}, the weighted share is {percent(float(low['headline_share']))} under "
                f"every one of {counted(len(rows), 'choice')}."
            )
            continue
        sentences.append(f"By {axis}, the weighted share runs from {_end(low)} to {_end(high)}.")
    return sentences


def _end(row: Any) -> str:
    """Write one end of a range: weighted share and choice, the counts with their own share."""
    counts = counts_of(row)
    return (
        f"{percent(counts.headline)} under {row['choice']} ({counts.survived:,} of "
        f"{counted(counts.admissible, 'row')}, unweighted {percent(counts.raw)})"
    )
