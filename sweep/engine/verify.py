"""Stored rows held against two other computations: least squares on the rows, and statsmodels.

The store promises that a statistic agrees with least squares on its rows to a relative 1e-8;
two sound computations differ by some 1e-10 of a well-conditioned regression.  Differences are
relative to the number itself, or to what is noise in it where the number is close to zero:
a coefficient sum to its standard error, a statistic to a thousandth of what chance gives.  A
p-value may differ by more than its statistic: by as much as the tail magnifies, x·f(x)/(1 − F(x)).
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from store import read
from store.database import open_reading
from sweep.engine.stored import prepared_again, row_of
from sweep.engine.verify_row import EXACT, NUMBERS, Found, verify_row
from sweep.errors import Fault, InputFault
from sweep.notebook import verification_html

if TYPE_CHECKING:
    import pandas as pd

    from sweep.results import Results

__all__ = ["Disagreement", "Quantity", "Verification", "verify"]

TOLERANCE = 1e-8


@dataclass(frozen=True, slots=True)
class Quantity:
    """How one stored number fared.

    Attributes
    ----------
    name : str
        Column of the store, or ``lag_coefficient`` and ``lag_standard_error``.
    compared : int
        Rows (lags, for lag coefficients) that have it.
    slow, outside : float or None
        Largest relative difference from least squares on the rows, and from statsmodels; None
        where nothing was compared or the number is a whole one or a word.
    differing : int
        How many differ by more than is allowed.
    """

    name: str
    compared: int
    slow: float | None
    outside: float | None
    differing: int


@dataclass(frozen=True, slots=True)
class Disagreement:
    """A stored value that does not come out again.

    Attributes
    ----------
    finding, specification, quantity : str
    stored, recomputed : str
        In words.
    by : str
        The computation that disagrees: ``least squares``, ``statsmodels`` or ``the plan``.
    """

    finding: str
    specification: str
    quantity: str
    stored: str
    recomputed: str
    by: str


@dataclass(frozen=True, slots=True, repr=False)
class Verification:
    """What came of recomputing a sample of a sweep.

    Attributes
    ----------
    sweep, rows, stored, seed : int
        Number of the sweep, rows checked, rows stored, seed of the sample.
    tolerance : float
        Largest relative difference allowed.
    represented : tuple of (str, int, int)
        Axis, finding, solver or status; how many of its values are in the sample, and occur.
    quantities : tuple of Quantity
    disagreements : tuple of Disagreement
    """

    sweep: int
    rows: int
    stored: int
    seed: int
    tolerance: float
    represented: tuple[tuple[str, int, int], ...]
    quantities: tuple[Quantity, ...]
    disagreements: tuple[Disagreement, ...]

    @property
    def agrees(self) -> bool:
        """Whether every stored value came out again."""
        return not self.disagreements

    @property
    def largest(self) -> float:
        """Largest relative difference of any number but p-values, by either computation."""
        found = [
            value
            for quantity in self.quantities
            if not quantity.name.endswith("p_value")
            for value in (quantity.slow, quantity.outside)
            if value is not None
        ]
        return max(found, default=0.0)

    def __repr__(self) -> str:
        many = len({(item.finding, item.specification) for item in self.disagreements})
        words = "every stored value came out again"
        if many:
            words = f"{many:,} rows do not hold what their plan and data give"
        return f"{self.rows:,} of {self.stored:,} rows recomputed: {words}"

    def _repr_html_(self) -> str:
        return verification_html(self)


def verify(
    results: Results,
    rows: int,
    seed: int,
    data: Path | None,
    tolerance: float,
    progress: Callable[[int, int], None] | None = None,
) -> Verification:
    """Recompute a sample of a sweep; see :meth:`sweep.results.Results.verify`."""
    if rows < 1:
        raise InputFault(Fault("rows", f"{rows} is no number of rows", "Ask for 1 or more."))
    if not 0 < tolerance < 1:
        raise InputFault(
            Fault("tolerance", f"{tolerance} is no relative difference", "Give one such as 1e-8.")
        )
    prepared = prepared_again(results, data)
    with open_reading(results.store) as database:
        drawn = read.sample(database, results.sweep, rows, seed)
        details = read.sample_details(database, results.sweep, drawn)
        strata = read.sample_strata(database, results.sweep)
    lags = dict(list(details.groupby(["finding", "specification"])))
    found: list[Found] = []
    told = time.monotonic()
    records = [{str(name): value for name, value in r.items()} for r in drawn.to_dict("records")]
    for number, row in enumerate(records):
        if progress is not None and time.monotonic() - told >= 0.2:
            progress(number, len(drawn))
            told = time.monotonic()
        key = (row["finding"], row["specification"])
        index = row_of(prepared, int(row["finding"]), str(row["specification"]))
        found += verify_row(prepared, index, row, lags.get(key, details.iloc[:0]), tolerance)
    return Verification(
        results.sweep,
        len(drawn),
        int(results.info["rows"]),
        seed,
        tolerance,
        _represented(drawn, strata),
        tuple(_quantity(name, found) for name in (*NUMBERS, *EXACT)),
        tuple(_disagreement(item) for item in found if item.differs),
    )


def _represented(drawn: pd.DataFrame, strata: dict[str, int]) -> tuple[tuple[str, int, int], ...]:
    """Count the values of each stratum that the sample holds beside those that occur."""
    held = {name: int(drawn[name].nunique()) for name in strata if name != "status"}
    endings = drawn[["reason", "status", "reverse_status"]].drop_duplicates()
    held["status"] = len(endings)
    return tuple((name, held[name], occurring) for name, occurring in strata.items())


def _quantity(name: str, found: list[Found]) -> Quantity:
    mine = [item for item in found if item.quantity == name]
    largest: dict[str, float | None] = {}
    for by in ("least squares", "statsmodels"):
        values = [i.difference for i in mine if i.by == by and i.difference is not None]
        largest[by] = max(values, default=None)
    return Quantity(
        name,
        len({(i.finding, i.specification, i.lag) for i in mine}),
        largest["least squares"],
        largest["statsmodels"],
        len({(i.finding, i.specification, i.lag) for i in mine if i.differs}),
    )


def _disagreement(item: Found) -> Disagreement:
    lag = f", lag {item.lag}" if item.lag else ""
    return Disagreement(
        item.finding, item.specification, f"{item.quantity}{lag}", item.stored, item.recomputed,
        item.by,
    )  # fmt: skip
