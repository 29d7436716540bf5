"""Checking what callers hand over before anything is written: columns, lengths, types, NULLs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt
import pandas as pd

from store.errors import BadBatch
from store.schema import AXES

__all__ = ["CODE_COLUMNS", "OUTCOME_COLUMNS", "details_frame", "outcome_frame", "planned_frame"]

Array: TypeAlias = npt.NDArray[Any]
Arrays: TypeAlias = Mapping[str, Array]

CODE_COLUMNS = AXES

# Columns of outcome without sweep, in the table's order, and what each may hold:
# an unsigned half, an integer, an integer or NULL, a float or NULL.
OUTCOME_COLUMNS: dict[str, str] = {
    "finding": "integer",
    "spec_high": "unsigned",
    "spec_low": "unsigned",
    "computation": "unsigned",
    "request": "integer",
    "lags": "integer",
    "deterministics": "integer",
    "window": "integer",
    "position": "integer",
    "transformation": "integer",
    "test": "integer",
    "conditioning": "integer",
    "measures": "integer",
    "order_used": "integer or NULL",
    "observations": "integer or NULL",
    "statistic": "float",
    "df_num": "integer or NULL",
    "df_den": "integer or NULL",
    "p_value": "float",
    "coefficient_sum": "float",
    "coefficient_sum_se": "float",
    "signed_partial_r2": "float",
    "standardised_sum": "float",
    "reverse_statistic": "float",
    "reverse_p_value": "float",
    "reverse_coefficient_sum": "float",
    "status": "integer",
    "reverse_status": "integer",
    "reason": "integer",
    "solver": "integer",
    "failed_mask": "integer",
    "reverse_failed_mask": "integer",
}

_DETAILS_COLUMNS: dict[str, str] = {
    "finding": "integer",
    "spec_high": "unsigned",
    "spec_low": "unsigned",
    "kind": "text",
    "position": "integer",
    "date": "date",
    "value": "float",
    "standard_error": "float",
    "p_value": "float",
    "critical_value": "float",
}

# What each direction must have where its status is ok, and must not have elsewhere.
_DIRECTIONS = {
    "status": ("statistic", "p_value"),
    "reverse_status": ("reverse_statistic", "reverse_p_value"),
}


def outcome_frame(batch: Arrays) -> pd.DataFrame:
    """Return a batch as a frame with the table's columns, checked.

    Parameters
    ----------
    batch : dict of arrays, each (rows,)
        See :meth:`store.write.SweepWriter.write`.

    Raises
    ------
    BadBatch
        The first thing found that breaks the contract.
    """
    columns = _columns(batch, OUTCOME_COLUMNS)
    for status, numbers in _DIRECTIONS.items():
        _check_direction(columns, status, numbers)
    _check_repeats(columns)
    return pd.DataFrame(columns, copy=False)


def details_frame(details: Arrays) -> pd.DataFrame:
    """Return details as a frame with the table's columns, checked like outcomes."""
    return pd.DataFrame(_columns(details, _DETAILS_COLUMNS), copy=False)


def planned_frame(planned: Arrays, required: Sequence[str]) -> pd.DataFrame:
    """Return planned rows as a frame with ``row`` numbering them from 0.

    Parameters
    ----------
    planned : dict of arrays, each (rows,)
        At least the required columns; ``request`` is taken along or set to 0, ``details``
        (whether the row's details are wanted) likewise or set to False.
    required : sequence of str
        Names of columns of ``outcome``.
    """
    missing = [name for name in required if name not in planned]
    if missing:
        raise BadBatch(f"Planned rows lack {', '.join(missing)}.")
    kinds = {name: OUTCOME_COLUMNS[name] for name in required}
    columns = _columns({name: planned[name] for name in required}, kinds)
    size = len(columns[required[0]])
    columns["row"] = np.arange(size)
    columns["request"] = np.asarray(planned.get("request", np.zeros(size, dtype=np.int16)))
    columns["details"] = np.asarray(planned.get("details", np.zeros(size, dtype=np.bool_)))
    return pd.DataFrame(columns, copy=False)


def _columns(arrays: Arrays, kinds: Mapping[str, str]) -> dict[str, Array]:
    missing = [name for name in kinds if name not in arrays]
    unknown = [name for name in arrays if name not in kinds]
    if missing or unknown:
        raise BadBatch(
            "; ".join(
                f"{word} columns: {', '.join(names)}"
                for word, names in (("missing", missing), ("unknown", unknown))
                if names
            )
        )
    columns = {name: _column(name, arrays[name], kind) for name, kind in kinds.items()}
    lengths = {name: len(column) for name, column in columns.items()}
    if len(set(lengths.values())) > 1:
        raise BadBatch(f"Columns differ in length: {lengths}.")
    return columns


def _column(name: str, values: Array, kind: str) -> Array:
    """Return one column in a type that the table takes without loss."""
    array = np.ma.filled(values.astype(np.float64), np.nan) if np.ma.isMA(values) else values
    array = np.asarray(array)
    if array.ndim != 1:
        raise BadBatch(f"{name} has {array.ndim} dimensions; a column has one.")
    letter = array.dtype.kind
    if kind == "unsigned" and array.dtype == np.uint64:
        return array
    if kind == "integer" and letter in "iub":
        return array.astype(np.int8) if letter == "b" else array
    if kind == "integer or NULL" and letter in "iuf":
        return _optional_integers(name, array)
    if kind == "float" and letter == "f":
        if np.isinf(array).any():
            raise BadBatch(f"{name} holds an infinite number; give NaN and a status.")
        return array
    if kind == "date" and letter == "M":
        return array.astype("datetime64[s]")
    if kind == "text" and letter in "OUT":
        return array.astype(object)
    raise BadBatch(f"{name} has type {array.dtype}; the store takes {kind} there.")


def _optional_integers(name: str, array: Array) -> Array:
    """Return integers as floats whose NaN is NULL; DuckDB casts them exactly."""
    floats = array.astype(np.float64)
    known = ~np.isnan(floats)
    if (floats[known] != np.rint(floats[known])).any():
        raise BadBatch(f"{name} holds numbers that are not whole.")
    floats[known & (np.nan_to_num(floats) < 0)] = np.nan
    return floats


def _check_direction(columns: Mapping[str, Array], status: str, numbers: Sequence[str]) -> None:
    codes = columns[status]
    if ((codes < 0) | (codes > 3)).any():
        raise BadBatch(f"{status} holds a code outside 0 to 3.")
    okay = codes == 0
    for name in numbers:
        missing = np.isnan(columns[name])
        if (missing & okay).any():
            row = int(np.flatnonzero(missing & okay)[0])
            raise BadBatch(f"{name} is missing in row {row} although {status} is ok.")
        if (~missing & ~okay).any():
            row = int(np.flatnonzero(~missing & ~okay)[0])
            raise BadBatch(f"{name} is given in row {row} although {status} is not ok.")
    p_value = columns[numbers[1]]
    if ((p_value < 0) | (p_value > 1)).any():
        raise BadBatch(f"{numbers[1]} lies outside 0 to 1.")


def _check_repeats(columns: Mapping[str, Array]) -> None:
    """Refuse a finding's specification that comes twice."""
    low = columns["spec_low"]
    ordered = np.sort(low)
    if not (ordered[1:] == ordered[:-1]).any():
        return
    keys = np.lexsort((low, columns["spec_high"], columns["finding"]))
    same = np.ones(max(len(keys) - 1, 0), dtype=np.bool_)
    for name in ("finding", "spec_high", "spec_low"):
        values = columns[name][keys]
        same &= values[1:] == values[:-1]
    if same.any():
        row = int(keys[int(np.flatnonzero(same)[0]) + 1])
        raise BadBatch(
            f"Row {row} repeats specification "
            f"{int(columns['spec_high'][row]):016x}{int(low[row]):016x} of its finding."
        )
