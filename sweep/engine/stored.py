"""From a stored sweep back to its plan, its data and a row of its table."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from sweep.engine.prepare import Prepared, prepare, with_data
from sweep.errors import Fault, InputFault
from sweep.plan.canonical import hex_id
from sweep.plan.load import plan_from_text

if TYPE_CHECKING:
    from sweep.results import Results

__all__ = ["prepared_again", "row_of"]


def prepared_again(results: Results, data: Path | None) -> Prepared:
    """Rebuild the plan from the store and read its data again.

    Parameters
    ----------
    results : Results
    data : Path or None
        Data file, where it is no longer where the plan says.

    Raises
    ------
    InputFault
        If the data are gone or have changed.
    """
    text = str(results.info["plan_toml"])
    plan = plan_from_text(text, results.store.with_suffix(".toml"))
    note = json.loads(str(results.info["data_note"]))
    candidates = [data] if data is not None else [plan.data_path, Path(note["file"])]
    path = next((p for p in candidates if p is not None and p.exists()), None)
    if path is None and data is not None:
        raise InputFault(Fault(str(data), "there is no such file", "Name the data file."))
    if path is None:
        raise InputFault(
            Fault(str(candidates[0]), "the data file is not there", "Name it with --data FILE.")
        )
    prepared = prepare(with_data(plan, path))
    held = zip(results.findings["data_high"], results.findings["data_low"], strict=True)
    for (high, low), key in zip(held, prepared.data_keys, strict=True):
        if (int(high), int(low)) != key:
            raise InputFault(
                Fault(
                    str(path),
                    "the data have changed since this sweep was run",
                    "Run the plan again, or name the earlier file with --data FILE.",
                )
            )
    return prepared


def row_of(prepared: Prepared, finding: int, specification: str) -> int:
    """Return the row of a specification in the plan's table.

    Parameters
    ----------
    prepared : Prepared
    finding : int
        Number of the finding.
    specification : str
        All 32 hexadecimal digits.

    Raises
    ------
    InputFault
        If the plan does not hold it.
    """
    high, low = int(specification[:16], 16), int(specification[16:], 16)
    rows = prepared.rows
    where = np.flatnonzero(
        (rows.finding == finding) & (rows.high == np.uint64(high)) & (rows.low == np.uint64(low))
    )
    if where.size != 1:
        raise InputFault(Fault(hex_id(high, low), "the stored plan does not hold it any more"))
    return int(where[0])
