"""A seeded sample of a sweep's rows in which everything that occurs is represented."""

from __future__ import annotations

import pandas as pd

from store.database import Database
from store.schema import AXES, query

__all__ = ["sample", "sample_details", "sample_strata"]

# What is represented: every choice of every axis, every finding, and every way in which rows end.
_STRATA = {
    "finding": "finding",
    **{axis: f'"{axis}"' for axis in AXES},
    "request": "request",
    "solver": "solver",
    "status": "reason::INTEGER * 16 + status * 4 + reverse_status",
}
_CODES = ", ".join(f'"{axis}"' for axis in AXES)


def sample_strata(db: Database, sweep: int) -> dict[str, int]:
    """Return how many different values of each stratum occur in a sweep."""
    counted = ", ".join(f"count(DISTINCT {value})" for value in _STRATA.values())
    row = db.execute(f"SELECT {counted} FROM outcome WHERE sweep = ?", [sweep])[0]
    return dict(zip(_STRATA, (int(count) for count in row), strict=True))


def sample(db: Database, sweep: int, rows: int, seed: int) -> pd.DataFrame:
    """Draw rows of a sweep: one or more for each stratum, then others, numbers first.

    Parameters
    ----------
    db : Database
        An open store.
    sweep : int
        Number of the sweep.
    rows : int
        Rows wanted; more come where the strata alone need more.
    seed : int
        The same seed draws the same rows, whatever the order in which they were stored.

    Returns
    -------
    pandas.DataFrame
        Every column of ``outcome`` beside the codes, with ``specification`` as text,
        ``window_start``, ``window_end``, the finding's ``name``, and the reason as
        ``reason_text`` and ``ruled``; ordered by finding and specification.
    """
    marked = (
        "SELECT finding, spec_high, spec_low, status, reverse_status, reason, request, solver, "
        f"{_CODES}, struct_pack(f := finding, h := spec_high, l := spec_low) AS id, "
        "md5(concat_ws('/', $seed, finding, spec_high, spec_low)) AS draw "
        "FROM outcome WHERE sweep = $sweep"
    )
    parts = [
        f"SELECT '{name}' AS stratum, arg_min(id, draw) AS id FROM marked GROUP BY {value}"
        for name, value in _STRATA.items()
    ]
    # The draw's order is the same for everyone, so the rows filled in come after the strata.
    sql = (
        f"WITH marked AS MATERIALIZED ({marked}), needed AS ({' UNION ALL '.join(parts)}) "
        "SELECT DISTINCT id.f AS finding, id.h AS spec_high, id.l AS spec_low FROM needed"
    )
    needed = db.frame(sql, {"sweep": sweep, "seed": seed})
    with db.registered("needed", needed):
        filled = db.frame(
            f"SELECT finding, spec_high, spec_low FROM ({marked}) ANTI JOIN needed "
            "USING (finding, spec_high, spec_low) ORDER BY status <> 0, draw LIMIT $more",
            {"sweep": sweep, "seed": seed, "more": max(rows - len(needed), 0)},
        )
    drawn = pd.concat([needed, filled], ignore_index=True)
    with db.registered("drawn", drawn):
        return db.frame(query("sample_rows"), {"sweep": sweep})


def sample_details(db: Database, sweep: int, drawn: pd.DataFrame) -> pd.DataFrame:
    """Return the stored lag coefficients of a sample's rows.

    Returns
    -------
    pandas.DataFrame
        ``finding, specification, kind, position, value, standard_error``.
    """
    with db.registered("drawn", drawn[["finding", "spec_high", "spec_low"]]):
        return db.frame(
            "SELECT finding, printf('%016x%016x', spec_high, spec_low) AS specification, kind, "
            "position, value, standard_error FROM details SEMI JOIN drawn "
            "USING (finding, spec_high, spec_low) WHERE sweep = $sweep "
            "ORDER BY ALL",
            {"sweep": sweep},
        )
