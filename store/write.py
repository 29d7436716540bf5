"""Writing a sweep: dictionaries, the sweep itself, reuse of stored rows, batches of outcomes."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from contextlib import ExitStack
from dataclasses import astuple
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt
import pandas as pd

from store.batches import CODE_COLUMNS, details_frame, outcome_frame, planned_frame
from store.database import Database, now
from store.errors import BadBatch
from store.records import (
    ChoiceRecord,
    FindingRecord,
    RequestChoiceRecord,
    RequestRecord,
    SweepChoiceRecord,
    SweepRecord,
)
from store.schema import AXES, query

__all__ = ["SweepWriter"]

Arrays: TypeAlias = Mapping[str, npt.NDArray[Any]]


class SweepWriter:
    """The one writer of a store; every method that adds rows is one transaction.

    Parameters
    ----------
    database : Database
        Open for writing.
    """

    def __init__(self, database: Database) -> None:
        self._database = database
        self._codes: dict[int, dict[tuple[int, str], npt.NDArray[np.int64]]] = {}

    def register_choices(self, axis: str, records: Sequence[ChoiceRecord]) -> list[int]:
        """Return the store's code of each choice, adding those it has not met.

        Parameters
        ----------
        axis : str
            Axis name.
        records : sequence of ChoiceRecord
            Choices of that axis.

        Returns
        -------
        list of int
            Codes from 1, in the order of ``records``.

        Raises
        ------
        ValueError
            The axis is unknown.
        """
        if axis not in AXES:
            raise ValueError(f"{axis!r} is no axis; the axes are {', '.join(AXES)}.")
        database = self._database
        known: dict[tuple[int, int], int] = {
            (high, low): code
            for high, low, code in database.execute(
                "SELECT token_high, token_low, code FROM choice WHERE axis = ?", [axis]
            )
        }
        new = []
        for record in records:
            token = (record.token_high, record.token_low)
            if token not in known:
                known[token] = max(known.values(), default=0) + 1
                new.append([axis, known[token], *token, record.label, record.meaning])
        self._insert("choice", new)
        return [known[record.token_high, record.token_low] for record in records]

    def register_reason(self, status: int, text: str, ruled: bool = False) -> int:
        """Return the code (from 1) of a reason, adding it where it is new.

        Parameters
        ----------
        status : int
            Status that the reason explains: 1, 2 or 3.
        text : str
            Words for people.
        ruled : bool
            True where the plan's author ruled the combination out; such rows are never
            reused by another sweep.
        """
        found: int | None = self._database.scalar(
            "SELECT code FROM reason WHERE status = ? AND text = ? AND ruled = ?",
            [status, text, ruled],
        )
        if found is not None:
            return found
        code: int = self._database.scalar("SELECT coalesce(max(code), 0) + 1 FROM reason")
        self._insert("reason", [[code, status, text, ruled]])
        return code

    def register_screen(self, bit: int, name: str) -> None:
        """Name a bit of the masks; a bit keeps its name for the life of the store.

        Raises
        ------
        ValueError
            The bit has another name already.
        """
        known = self._database.scalar("SELECT name FROM screen WHERE bit = ?", [bit])
        if known is None:
            self._insert("screen", [[bit, name]])
        elif known != name:
            raise ValueError(f"Bit {bit} is the screen {known!r} in this store, not {name!r}.")

    def begin(
        self,
        sweep: SweepRecord,
        findings: Sequence[FindingRecord],
        choices: Sequence[SweepChoiceRecord],
        positions: Arrays,
        requests: Sequence[RequestRecord] = (),
        request_choices: Sequence[RequestChoiceRecord] = (),
    ) -> int:
        """Start a sweep, or take up one that was begun with the same plan and data.

        Parameters
        ----------
        sweep : SweepRecord
            The sweep; plan digest and numerics say whether it is the same one.
        findings : sequence of FindingRecord
            Its findings; so do their data keys.
        choices : sequence of SweepChoiceRecord
            Every choice of every finding.
        positions : dict of arrays, each (positions,)
            ``finding``, ``window`` (code), ``position``, ``window_start`` and ``window_end``
            (``datetime64[D]``) of every window.
        requests : sequence of RequestRecord
            Questions of referees; rows added for one carry its number.
        request_choices : sequence of RequestChoiceRecord
            The choices that they name.

        Returns
        -------
        int
            Number of the sweep; where it was begun before, nothing but an event is added.
        """
        database = self._database
        earlier = self._begun(sweep, findings)
        if earlier is not None:
            self._event(earlier, "resumed", sweep.title)
            return earlier
        frame = pd.DataFrame({name: np.asarray(values) for name, values in positions.items()})
        number: int = database.scalar("SELECT coalesce(max(sweep), 0) + 1 FROM sweep")
        with database.registered("new_positions", frame), database.transaction():
            self._insert("sweep", [[number, *astuple(sweep), now()]])
            self._insert("finding", [[number, *astuple(finding)] for finding in findings])
            self._insert("sweep_choice", [[number, *astuple(choice)] for choice in choices])
            self._insert("request", [[number, *astuple(request)] for request in requests])
            self._insert("request_choice", [[number, *astuple(one)] for one in request_choices])
            database.execute(
                'INSERT INTO window_position SELECT ?, finding, "window", position, '
                "window_start::DATE, window_end::DATE FROM new_positions",
                [number],
            )
            self._event(number, "begun", sweep.title)
        return number

    def stored(self, sweep: int, planned: Arrays) -> npt.NDArray[np.bool_]:
        """Say which planned rows this sweep already has.

        Parameters
        ----------
        sweep : int
            Number of the sweep.
        planned : dict of arrays, each (rows,)
            ``finding``, ``spec_high`` and ``spec_low`` (uint64); other columns are ignored.

        Returns
        -------
        bool array, shape (rows,)
            In the order of ``planned``.
        """
        frame = planned_frame(planned, ("finding", "spec_high", "spec_low"))
        with self._database.registered("planned", frame):
            rows = self._database.frame(query("stored"), {"sweep": sweep})
        return _flags(rows["row"].to_numpy(), len(frame))

    def reuse(self, sweep: int, planned: Arrays) -> npt.NDArray[np.bool_]:
        """Copy rows (and their details) that other sweeps of this store already have.

        A row is copied if specification, data key of its measures and numerics are equal,
        neither direction failed, it was not ruled out by the other plan's author, and its
        details are stored if they are wanted and it has numbers.  Rows that this sweep has
        already are left alone.

        Parameters
        ----------
        sweep : int
            Number of the sweep.
        planned : dict of arrays, each (rows,)
            ``finding``, ``spec_high``, ``spec_low`` (uint64), ``position`` and, optionally,
            ``request`` (0 where not given): these are what the copies carry.  Optionally
            ``details`` (bool): rows whose details are wanted and copied.

        Returns
        -------
        bool array, shape (rows,)
            True where this call filled the row.
        """
        frame = planned_frame(planned, ("finding", "spec_high", "spec_low", "position"))
        database = self._database
        if not database.scalar(query("reuse_sources"), {"sweep": sweep}):
            return np.zeros(len(frame), dtype=np.bool_)
        with database.registered("planned", frame), database.transaction():
            database.execute(query("reuse_match"), {"sweep": sweep})
            database.execute(query("reuse_outcomes"), {"sweep": sweep})
            database.execute(query("reuse_details"), {"sweep": sweep})
            rows = database.frame("SELECT row FROM reuse_match")
            database.execute("DROP TABLE reuse_match")
        return _flags(rows["row"].to_numpy(), len(frame))

    def write(self, sweep: int, batch: Arrays, details: Arrays | None = None) -> None:
        """Append a batch of outcomes and their details in one transaction.

        Parameters
        ----------
        sweep : int
            Number of the sweep.
        batch : dict of arrays, each (rows,)
            Every column of ``outcome`` except ``sweep``.  NaN stands for NULL in the float
            columns; in ``order_used``, ``observations``, ``df_num`` and ``df_den`` NaN or a
            negative number does.
        details : dict of arrays, each (entries,), optional
            Every column of ``details`` except ``sweep``; ``date`` may be NaT.

        Raises
        ------
        BadBatch
            Columns missing or unknown, lengths or types that do not fit, numbers missing
            where the status is ok or present where it is not, p-values outside [0, 1],
            a specification twice, a code that the sweep did not register.
        """
        frames = {"outcome": outcome_frame(batch)}
        self._check_codes(sweep, frames["outcome"])
        if details is not None:
            frames["details"] = details_frame(details)
        database = self._database
        with ExitStack() as stack:
            # Frames are let go after the transaction: DuckDB refuses it inside a failed one.
            for table, frame in frames.items():
                stack.enter_context(database.registered(f"new_{table}", frame))
            stack.enter_context(database.transaction())
            for table, frame in frames.items():
                columns = ", ".join(f'"{name}"' for name in frame.columns)
                database.execute(
                    f"INSERT INTO {table} SELECT ?, {columns} FROM new_{table}", [sweep]
                )

    def finish(self, sweep: int, wall_seconds: float, counts: Mapping[str, int]) -> None:
        """Record that a sweep ran to its end and write the log into the file.

        Parameters
        ----------
        sweep : int
            Number of the sweep.
        wall_seconds : float
            Seconds that this run took.
        counts : mapping of str to int
            Rows by kind, such as ``computed`` and ``reused``.
        """
        text = json.dumps({"wall_seconds": wall_seconds, "counts": dict(counts)})
        self._event(sweep, "finished", text)
        self._database.checkpoint()

    def log(self, kind: str, text: str, sweep: int | None = None) -> None:
        """Add an event, of one sweep or of the store."""
        self._event(sweep, kind, text)

    def _event(self, sweep: int | None, kind: str, text: str) -> None:
        self._insert("event", [[now(), sweep, kind, text]])

    def _insert(self, table: str, rows: Sequence[Sequence[Any]]) -> None:
        """Insert a few rows; dictionaries are small, so one statement holds many of them."""
        for start in range(0, len(rows), 200):
            part = rows[start : start + 200]
            marks = ", ".join(f"({', '.join('?' * len(row))})" for row in part)
            self._database.execute(
                f"INSERT INTO {table} VALUES {marks}", [cell for row in part for cell in row]
            )

    def _begun(self, sweep: SweepRecord, findings: Sequence[FindingRecord]) -> int | None:
        """Return the latest sweep with this plan, these numerics and these data."""
        wanted = {(f.finding, f.data_high, f.data_low) for f in findings}
        candidates = self._database.execute(
            "SELECT sweep FROM sweep WHERE plan_digest = ? AND numerics = ? ORDER BY sweep DESC",
            [sweep.plan_digest, sweep.numerics],
        )
        for (number,) in candidates:
            keys = self._database.execute(
                "SELECT finding, data_high, data_low FROM finding WHERE sweep = ?", [number]
            )
            if set(keys) == wanted:
                return int(number)
        return None

    def _check_codes(self, sweep: int, frame: pd.DataFrame) -> None:
        """Refuse codes that the sweep's choices do not hold: the views would lose such rows."""
        if sweep not in self._codes:
            rows = self._database.execute(
                "SELECT finding, axis, list(code) FROM sweep_choice WHERE sweep = ? GROUP BY ALL",
                [sweep],
            )
            self._codes[sweep] = {(f, axis): np.asarray(codes) for f, axis, codes in rows}
        known = self._codes[sweep]
        nothing = np.empty(0, dtype=np.int64)
        for finding in np.unique(frame["finding"]):
            part = frame[frame["finding"] == finding]
            for axis in CODE_COLUMNS:
                strange = np.setdiff1d(
                    part[axis].unique(), known.get((int(finding), axis), nothing)
                )
                if strange.size:
                    raise BadBatch(
                        f"Sweep {sweep} has no {axis} choice with code {strange[0]} for finding "
                        f"{finding}. Hand it to begin() first."
                    )


def _flags(rows: npt.NDArray[np.int64], size: int) -> npt.NDArray[np.bool_]:
    flags = np.zeros(size, dtype=np.bool_)
    flags[rows] = True
    return flags
