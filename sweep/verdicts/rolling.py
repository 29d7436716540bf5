"""Moving windows as paths over time: episodes in which a finding holds, and their lengths."""

from __future__ import annotations

from typing import Any

import pandas as pd

from .words import missing

__all__ = ["BASES", "episodes", "path_state"]

# What "holds" can mean for a position: of the one row with the baseline's other choices, or of
# at least half of all admissible rows.
BASES = ("baseline's other choices", "at least half of the rows")

_COLUMNS = (
    "window_name", "basis", "state", "first_end", "last_end", "positions", "first_start",
    "lowest_p", "highest_p", "open_end",
)  # fmt: skip


def path_state(row: Any, basis: str) -> str:
    """Say whether a finding holds at one position of a moving window.

    Parameters
    ----------
    row : mapping
        A row of the store's frame ``window_paths``.
    basis : str
        One of ``BASES``.

    Returns
    -------
    str
        ``holds``, ``does not hold``, or ``not admissible``.
    """
    if basis == BASES[0]:
        if missing(row["baseline_survives"]):
            return "not admissible"
        return "holds" if row["baseline_survives"] else "does not hold"
    if not int(row["admissible"]):
        return "not admissible"
    return "holds" if 2 * int(row["survived"]) >= int(row["admissible"]) else "does not hold"


def episodes(paths: pd.DataFrame) -> pd.DataFrame:
    """Gather neighbouring positions in the same state into episodes.

    Parameters
    ----------
    paths : DataFrame
        The store's frame ``window_paths`` of one finding.

    Returns
    -------
    pandas.DataFrame
        One row for each window entry, basis and longest run of neighbouring positions in one
        state, in order of time: ``window_name, basis, state, first_end, last_end`` (last dates
        of its first and last window), ``positions`` (its length in positions),
        ``first_start`` (first date of its first window), ``lowest_p, highest_p`` (of the
        basis; the median p where the basis is half of the rows), ``open_end`` (whether it
        reaches the entry's last position).
    """
    found = []
    for name, own in paths.groupby("window_name", sort=False):
        rows = own.sort_values("position").to_dict("records")
        for basis in BASES:
            column = "baseline_p" if basis == BASES[0] else "median_p"
            for run in _runs([path_state(row, basis) for row in rows]):
                held = rows[run.start : run.stop]
                values = [float(row[column]) for row in held if not missing(row[column])]
                found.append(
                    (
                        name, basis, path_state(held[0], basis), held[0]["window_end"],
                        held[-1]["window_end"], len(held), held[0]["window_start"],
                        min(values, default=None), max(values, default=None),
                        run.stop == len(rows),
                    )
                )  # fmt: skip
    return pd.DataFrame(found, columns=list(_COLUMNS))


def _runs(states: list[str]) -> list[range]:
    """Return the runs of equal neighbours, as ranges of positions."""
    starts = [i for i, state in enumerate(states) if i == 0 or state != states[i - 1]]
    return [range(a, b) for a, b in zip(starts, [*starts[1:], len(states)], strict=True)]
