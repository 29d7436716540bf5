"""The data set, its digest, and what can be wrong with the series in it."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sweep.errors import Fault
from sweep.panel.calendar import Calendar
from sweep.panel.dates import listed

__all__ = [
    "Dataset",
    "collinear_faults",
    "constant_faults",
    "data_digest",
    "magnitude_faults",
    "missing_faults",
    "positive_faults",
    "values_digest",
]

# Series count as tied when what one adds to the others is below this share of its spread;
# printed sums that were rounded to a few decimals stay far above it.
_TIED = 1e-10

# Largest size of a value: sums of products of four such numbers are still finite.
_LARGEST = 1e75


@dataclass(frozen=True, slots=True, eq=False)
class Dataset:
    """Series on a calendar.

    Attributes
    ----------
    path : Path
        The file they came from.
    calendar : Calendar
        Period of each row.
    names : tuple of str, length m
        Series, in the order asked for.
    values : float64 (n, m)
        In the units of the file, NaN where missing.
    file_digest : str
        SHA-256 of the file, in hexadecimal.
    lines : tuple of int, length n or 0
        Line or row of the file for each row; empty where there is no file behind the values.
    unit : str
        ``line`` or ``row``.
    """

    path: Path
    calendar: Calendar
    names: tuple[str, ...]
    values: NDArray[np.float64]
    file_digest: str
    lines: tuple[int, ...] = ()
    unit: str = "line"

    def column(self, name: str) -> NDArray[np.float64]:
        """Return the values (n,) of one series.

        Raises
        ------
        KeyError
            If there is no such series.
        """
        if name not in self.names:
            raise KeyError(name)
        return self.values[:, self.names.index(name)]

    def place(self, name: str, row: int | None = None) -> str:
        """Name a series in the file, and a row of it."""
        if row is None:
            return f"{self.path.name}, column {name}"
        where = f"{self.unit} {self.lines[row]}" if self.lines else self.calendar.label(row)
        return f"{self.path.name}, {where}, column {name}"

    def periods(self, rows: NDArray[np.int64]) -> str:
        """Name the periods of some rows for a message."""
        return listed([self.calendar.label(int(row)) for row in rows])


def data_digest(dataset: Dataset, names: Sequence[str]) -> tuple[int, int]:
    """Return the key of the data behind a finding as two unsigned 64-bit halves (high, low).

    BLAKE2b-128 of the frequency, the calendar rule, the dates and the names and values of
    the series in sorted order.  File names, other columns and the order of columns leave
    it unchanged; any edited value, date or missing cell changes it.
    """
    digest = _calendar_digest(dataset.calendar)
    for name in sorted(set(names)):
        digest.update(f"{name}\0".encode())
        digest.update(_value_bytes(dataset, name))
    value = int.from_bytes(digest.digest(), "big")
    return value >> 64, value & (2**64 - 1)


def values_digest(dataset: Dataset, name: str) -> str:
    """Return a digest of the dates and values of one series, its name left aside.

    Two columns that hold the same values share it.
    """
    digest = _calendar_digest(dataset.calendar)
    digest.update(_value_bytes(dataset, name))
    return digest.hexdigest()


def _calendar_digest(calendar: Calendar) -> hashlib.blake2b:
    digest = hashlib.blake2b(digest_size=16)
    rule = "as observed" if calendar.as_observed else "every period"
    digest.update(f"{calendar.frequency.name}\0{rule}\0".encode())
    days = np.array([day.toordinal() for day in calendar.dates], dtype="<i8")
    digest.update(days.tobytes())
    return digest


def _value_bytes(dataset: Dataset, name: str) -> bytes:
    column = dataset.column(name).astype("<f8") + 0.0  # -0.0 and 0.0 are one value
    column[np.isnan(column)] = np.nan  # one bit pattern for all missing values
    return column.tobytes()


def magnitude_faults(dataset: Dataset, names: Sequence[str]) -> list[Fault]:
    """Find series whose squares would leave the range of floating-point numbers.

    A value may not exceed 1e75 in size, nor may all values of a series lie below 1e-75.
    """
    faults = []
    for name in names:
        size = np.abs(dataset.column(name))
        large = np.flatnonzero(size > _LARGEST)
        if large.size:
            what = "value is" if large.size == 1 else "values are"
            problem = (
                f"{large.size} {what} larger than {_LARGEST:g} in size: {dataset.periods(large)}"
            )
            mend = "Such numbers cannot be squared and summed; give the series in another unit."
            faults.append(Fault(dataset.place(name, int(large[0])), problem, mend))
        elif 0.0 < np.max(size, where=np.isfinite(size), initial=0.0) < 1.0 / _LARGEST:
            problem = f"every value is smaller than {1.0 / _LARGEST:g} in size"
            mend = "Such numbers cannot be squared and summed; give the series in another unit."
            faults.append(Fault(dataset.place(name), problem, mend))
    return faults


def missing_faults(
    dataset: Dataset, names: Sequence[str], covered: Sequence[tuple[int, int]] = ()
) -> list[Fault]:
    """Find missing values between the first and last value of a series.

    Parameters
    ----------
    dataset : Dataset
        The data.
    names : sequence of str
        Series to look at.
    covered : sequence of (int, int)
        First and last row, inclusive, of episodes that every window leaves out; what is
        missing inside them is no fault.
    """
    faults = []
    allowed = np.zeros(len(dataset.calendar), dtype=bool)
    for first, last in covered:
        allowed[first : last + 1] = True
    for name in names:
        here = np.isfinite(dataset.column(name))
        found = np.flatnonzero(here)
        if found.size == 0:
            mend = "Choose another series, or fill the column."
            faults.append(Fault(dataset.place(name), "there is no value in the column", mend))
            continue
        inside = np.zeros(here.shape, dtype=bool)
        inside[found[0] : found[-1]] = True
        holes = np.flatnonzero(inside & ~here & ~allowed)
        if holes.size:
            what = "a value is" if holes.size == 1 else f"{holes.size} values are"
            problem = f"{what} missing inside the sample: {dataset.periods(holes)}"
            mend = (
                "Fill it in the file, start or end the series there, or leave the episode out "
                "of every window with without = [first, last]."
            )
            faults.append(Fault(dataset.place(name, int(holes[0])), problem, mend))
    return faults


def constant_faults(dataset: Dataset, names: Sequence[str]) -> list[Fault]:
    """Find series that never move."""
    faults = []
    for name in names:
        column = dataset.column(name)
        values = column[np.isfinite(column)]
        if values.size and values.min() == values.max():
            problem = f"the series is constant: every value is {values[0]:g}"
            mend = "A series that never moves can neither lead nor follow; choose another."
            faults.append(Fault(dataset.place(name), problem, mend))
    return faults


def positive_faults(dataset: Dataset, names: Sequence[str]) -> list[Fault]:
    """Find values of which no log exists, in series that a plan takes logs of."""
    faults = []
    for name in names:
        column = dataset.column(name)
        bad = np.flatnonzero(column <= 0.0)
        if bad.size:
            what = "value is" if bad.size == 1 else "values are"
            problem = (
                f"{bad.size} {what} zero or negative, so no log exists: {dataset.periods(bad)}"
            )
            mend = (
                "Give this series another transformation, such as “difference” or "
                "“inverse hyperbolic sine”."
            )
            faults.append(Fault(dataset.place(name, int(bad[0])), problem, mend))
    return faults


def collinear_faults(dataset: Dataset, names: Sequence[str]) -> list[Fault]:
    """Find series that are exact linear combinations of others and a constant.

    Judged on the rows that all series share.  Series that differ only by scale and origin
    are named in pairs; larger ties name every series that takes part.  Constant series
    are left to `constant_faults`.
    """
    chosen = [name for name in dict.fromkeys(names) if not constant_faults(dataset, [name])]
    if len(chosen) < 2:
        return []
    data = np.column_stack([dataset.column(name) for name in chosen])
    data = data[np.isfinite(data).all(axis=1)]
    if data.shape[0] <= len(chosen) + 1:
        return []  # too few rows to tell; the window checks say so
    spread = data.std(axis=0)
    if np.any(spread == 0.0):
        return []  # constant on the shared rows only
    # Rounding of a high level must not hide a tie nor pass for variation.
    noise = 64.0 * np.finfo(float).eps * float(np.max(np.abs(data).max(axis=0) / spread))
    scaled = (data - data.mean(axis=0)) / (spread * np.sqrt(data.shape[0]))
    return _ties(dataset, chosen, scaled, max(_TIED, noise))


def _ties(
    dataset: Dataset, names: list[str], scaled: NDArray[np.float64], bound: float
) -> list[Fault]:
    """Take columns one by one; a column that adds nothing to those before it is tied to them."""
    faults = []
    free: list[int] = []
    for place, name in enumerate(names):
        before = scaled[:, free]
        weights = np.linalg.lstsq(before, scaled[:, place], rcond=None)[0] if free else np.empty(0)
        left = scaled[:, place] - before @ weights
        if np.linalg.norm(left) > bound:
            free.append(place)
            continue
        partners = [names[j] for j, weight in zip(free, weights, strict=True) if abs(weight) > 1e-6]
        problem = f"perfectly collinear with {listed(partners)}"
        if len(partners) > 1:
            problem = f"perfectly collinear: a fixed combination of {listed(partners)}"
        mend = "Leave one of these series out."
        faults.append(Fault(dataset.place(name), problem, mend))
    return faults
