"""One sweep of a store, read: frames, rows and answers; nothing is drawn or written here."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

from store import read
from store.database import Database, open_reading
from store.errors import NotFound, NothingStored, QueryFault
from store.query import query_frame, query_stream
from sweep.errors import Fault, InputFault
from sweep.plan.choices import AXES
from sweep.plan.suggest import suggestion

if TYPE_CHECKING:
    import pandas as pd

    from sweep.engine.run import RunReport

__all__ = ["StoredSweep"]


class StoredSweep:
    """One sweep of a store.

    The file is opened for each question and closed again, so that a run can go on.

    Parameters
    ----------
    store : str or Path
        DuckDB file that ``run`` wrote.
    sweep : int or None
        Number of the sweep; None for the latest.
    report : RunReport or None
        What the run that made these results did.

    Raises
    ------
    store.errors.StoreError
        If the file is missing, locked, damaged, or no store of this version.
    store.errors.NotFound
        If the store holds no such sweep.
    """

    def __init__(
        self, store: str | Path, sweep: int | None = None, report: RunReport | None = None
    ) -> None:
        self.store = Path(store)
        self.run_report = report
        with open_reading(self.store) as database:
            self.sweep = read.latest_sweep(database) if sweep is None else sweep
            self.info = read.sweep_info(database, self.sweep)
            self.findings = read.findings(database, self.sweep)

    def _open(self) -> Database:
        """Open the store for a question on the sweep.

        Raises
        ------
        store.errors.NothingStored
            If a run was stopped before it stored anything.
        """
        database = open_reading(self.store)
        try:
            read.require_rows(database, self.sweep)
        except NothingStored:
            database.close()
            raise
        return database

    @property
    def unfinished(self) -> str:
        """Say how much of the sweep is stored where that is not everything; else empty."""
        stored, planned = int(self.info["rows"]), int(self.info["planned"] or 0)
        if stored >= planned:
            return ""
        if not stored:
            return "Nothing of this sweep is stored yet; run the plan again to go on."
        return (
            f"Unfinished: {stored:,} of {planned:,} specifications are stored; run the plan again "
            "to go on. Shares and counts are of what is stored."
        )

    def sweeps(self) -> pd.DataFrame:
        """Return one row for each sweep of the store, oldest first."""
        with open_reading(self.store) as database:
            return read.sweeps(database)

    def survival(self, by: str | None = None, finding: str | int | None = None) -> pd.DataFrame:
        """Return how often the findings survive, with all counts.

        Parameters
        ----------
        by : str or None
            An axis (``lags``, ``deterministics``, ``window``, ``transformation``, ``test``,
            ``conditioning``, ``measures``), ``all`` for the overall rows, None for everything.
        finding : str, int or None
            Name or number of a finding; None for all.

        Returns
        -------
        pandas.DataFrame
            The store's view ``survival``: counts, ``raw_share`` and the weighted
            ``headline_share``, also at 1%, 5% and 10%.
        """
        if by is not None and by not in (*AXES, "all"):
            raise InputFault(Fault("by", f'"{by}" is no axis' + suggestion(by, (*AXES, "all"))))
        number = None if finding is None else self._number(finding)
        with self._open() as database:
            return read.survival(database, self.sweep, number, by)

    def outcomes(
        self, columns: Sequence[str] | None = None, where: str | None = None
    ) -> pd.DataFrame:
        """Return one row a specification; names are categoricals.

        Parameters
        ----------
        columns : sequence of str or None
            Columns of the view ``outcomes``; None for all.
        where : str or None
            SQL condition on its columns.

        Raises
        ------
        InputFault
            If there is no such column, or the condition cannot be answered.
        """
        if isinstance(columns, str):
            mend = f'Write ["{columns}"].'
            raise InputFault(Fault("columns", "a list of names is needed, not one text", mend))
        with self._open() as database:
            known = read.outcome_columns(database)
            wanted = known if columns is None else list(columns)
            faults = [
                Fault("columns", f'"{name}" is no column of outcomes'
                      + suggestion(name, known, list_all=len(known)))
                for name in wanted
                if name not in known
            ]
            if faults or not wanted:
                raise InputFault(*faults or [Fault("columns", "no column is named")])
            try:
                return read.outcomes(database, self.sweep, wanted, where)
            except (QueryFault, ValueError) as error:
                raise InputFault(Fault("where", str(error).rstrip("."))) from None

    def query(self, sql: str) -> pd.DataFrame:
        """Ask the store a question in SQL; nothing else can be read, nothing written.

        Parameters
        ----------
        sql : str
            One statement of DuckDB's that reads.  ``outcomes`` and ``survival`` hold every
            sweep of the store; ``$sweep`` stands for the number of this one.

        Returns
        -------
        pandas.DataFrame

        Raises
        ------
        store.errors.QueryFault
            If it is not one such statement, or cannot be answered.
        """
        with open_reading(self.store, confined=True) as database:
            return query_frame(database, self.sweep, sql)

    @contextmanager
    def stream(
        self, sql: str, size: int = 1000
    ) -> Iterator[tuple[list[tuple[str, str]], Iterator[list[tuple[Any, ...]]]]]:
        """Ask as :meth:`query` does and read the rows in portions, in a ``with`` block.

        Yields
        ------
        columns : list of (name, type)
        portions : iterator of lists of rows
            At most ``size`` rows each.
        """
        with open_reading(self.store, confined=True) as database:
            yield query_stream(database, self.sweep, sql, size)

    def specification(self, prefix: str, finding: str | int | None = None) -> dict[str, Any]:
        """Return the stored row of one specification as a mapping."""
        number = None if finding is None else self._number(finding)
        if prefix == "baseline":
            number = number or 0
            record = self._record(number)
            prefix = f"{int(record['baseline_high']):016x}{int(record['baseline_low']):016x}"
        with self._open() as database:
            try:
                row = read.specification(database, self.sweep, prefix, number)
            except NotFound as error:
                if not self.unfinished:
                    raise
                raise NotFound(f"{error} {self.unfinished}") from None
        return {str(key): value for key, value in row.iloc[0].items()}

    def details(self, specification: str, finding: str | int = 0) -> pd.DataFrame:
        """Return the stored lag coefficients of one specification (all 32 digits)."""
        with self._open() as database:
            return read.details(database, self.sweep, self._number(finding), specification)

    def _frames(self, number: int, names: Sequence[str]) -> dict[str, pd.DataFrame]:
        with self._open() as database:
            return self._read_frames(database, number, names)

    def _read_frames(
        self, database: Database, number: int, names: Sequence[str]
    ) -> dict[str, pd.DataFrame]:
        frames = {
            name: getattr(read, name)(database, self.sweep, number)
            for name in dict.fromkeys(names)
        }
        if "windows" in frames:
            left_out = self._episodes()
            frames["windows"]["episodes"] = [
                left_out.get(str(name), "") for name in frames["windows"]["window_name"]
            ]
        return frames

    def _episodes(self) -> dict[str, str]:
        """Return the episodes that each window entry leaves out, as the charts want them."""
        from sweep.panel.periods import parse_period
        from sweep.plan.choices import WindowChoice
        from sweep.plan.load import plan_from_text

        plan = plan_from_text(str(self.info["plan_toml"]), self.store.with_suffix(".toml"))
        found = {}
        for choice in plan.axes["window"]:
            assert isinstance(choice, WindowChoice)
            days = [
                (parse_period(first, plan.frequency)[0], parse_period(last, plan.frequency)[1])
                for first, last in choice.without
            ]
            found[choice.label] = ";".join(f"{a.isoformat()}/{b.isoformat()}" for a, b in days)
        return found

    def _record(self, number: int) -> dict[str, Any]:
        row = self.findings[self.findings["finding"] == number].iloc[0]
        return {str(key): value for key, value in row.items()}

    def _number(self, finding: str | int) -> int:
        names = {str(n): int(f) for n, f in zip(self.findings["name"], self.findings["finding"],
                                                strict=True)}  # fmt: skip
        if isinstance(finding, int) and finding in names.values():
            return finding
        if finding in names:
            return names[str(finding)]
        near = suggestion(str(finding), names)
        stop = "" if near.endswith("?") else "."
        raise NotFound(f'No finding is called "{finding}"{near}{stop}')
