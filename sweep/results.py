"""Reading a store: the same verbs as the commands, frames out."""

from __future__ import annotations

import html
import json
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import replace
from functools import partial
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
    import altair
    import pandas as pd

    from sweep.charts.context import Context
    from sweep.comparison import Comparison
    from sweep.engine.explain import Explanation
    from sweep.engine.run import RunReport
    from sweep.engine.verify import Verification
    from sweep.report.chart_files import DrawnChart
    from sweep.report.content import ReportContent
    from sweep.report.library import Library
    from sweep.report.tables import Table

__all__ = ["Results"]


class Results:
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

    def chart(
        self,
        name: str,
        finding: str | int | None = None,
        width: str = "wide",
        *,
        axes: str | Sequence[str] | None = None,
        scale: str | None = None,
    ) -> altair.LayerChart:
        """Return a stability chart of one finding.

        The chart is an object of altair's: save it, or change it.  A notebook shows it as a
        picture, without a network.

        Parameters
        ----------
        name : str
            Name of a chart (``sweep.charts.CHARTS``); hyphens may stand for its spaces.
        finding : str, int or None
            Name or number of a finding; the first if None.
        width : str
            ``wide`` (175 mm in print) or ``narrow`` (85 mm).
        axes : str, sequence of str or None
            Of ``two axes``: names of the two; the pair that acts together most if None.
        scale : str or None
            Of ``specification curve``: name of one scale, ``baseline`` for the baseline's, or
            ``all``; the only scale there is or all of them if None.

        Raises
        ------
        InputFault
            If there is no such chart, width or option of it.
        """
        from sweep.charts.render import altair_chart

        drawn = self._drawn(name, finding, width, {"axes": axes, "scale": scale})
        return altair_chart({**drawn.plain, "description": drawn.words})

    def save_chart(
        self,
        name: str,
        output: str | Path | None = None,
        formats: Sequence[str] = (),
        finding: str | int | None = None,
        width: str = "wide",
        *,
        axes: str | Sequence[str] | None = None,
        scale: str | None = None,
    ) -> list[Path]:
        """Write a stability chart into files, all of them or none, and return their paths.

        Parameters
        ----------
        name, finding, width, axes, scale
            As for :meth:`chart`.
        output : str, Path or None
            File, whose ending says how it is written where no formats are given; beside the
            store, under its name and the chart's, if None.
        formats : sequence of str
            Any of ``svg``, ``pdf``, ``png``, ``html`` (opens offline, with numbers at the
            pointer), ``json`` (the chart in the language of its values), ``csv`` (the numbers
            behind it) and ``txt`` (the figure in words), or ``all``.

        Raises
        ------
        InputFault
            If there is no such chart, width, option or format, or a file cannot be written.
        """
        from sweep.charts import named
        from sweep.report.chart_files import contents, targets
        from sweep.writing import write_together

        known = named(name)
        default = self.store.with_name(f"{self.store.stem}-{known.replace(' ', '-')}")
        files = targets(None if output is None else Path(output), formats, default)
        drawn = self._drawn(known, finding, width, {"axes": axes, "scale": scale})
        return write_together(contents(drawn, files), own=self.own_files())

    def _drawn(
        self, name: str, finding: str | int | None, width: str, options: dict[str, Any]
    ) -> DrawnChart:
        from sweep.charts import chart, named
        from sweep.report.chart_files import draw_chart

        known = named(name)
        number = self._number(0 if finding is None else finding)
        frames = self._frames(number, (*chart(known).NEEDS, "survival"))
        return draw_chart(known, frames, self._context(number, frames), width, options)

    def _context(self, number: int, frames: dict[str, pd.DataFrame]) -> Context:
        from sweep.charts.context import context_of

        return context_of(
            self._record(number), frames["survival"], significance=float(self.info["significance"]),
            title=str(self.info["title"]), design=str(self.info["design"]),
        )  # fmt: skip

    def table(
        self,
        name: str,
        finding: str | int | None = None,
        *,
        rows: int | None = None,
        stars: bool = False,
        data: str | Path | None = None,
    ) -> Table:
        """Return a table of one finding; ``save`` writes it, ``text`` shows it.

        Parameters
        ----------
        name : str
            A key of :data:`sweep.report.tables.TABLES`; hyphens may stand for its spaces.
        finding : str, int or None
            Name or number of the finding; the first if None.
        rows : int or None
            Most rows; None for at most 500 in print and for all in CSV.
        stars : bool
            Whether print marks small p-values of single specifications by stars.
        data : str, Path or None
            Data file, for the table that needs it, where it is no longer where the plan says.

        Raises
        ------
        InputFault
            If there is no such table, or the data are needed and gone or changed.
        """
        from sweep.report.tables import long_list, table_named

        module = table_named(name)
        number = self._number(0 if finding is None else finding)
        stored = [need for need in module.NEEDS if need != "lag_selection"]
        frames = self._frames(number, (*stored, "survival"))
        if "lag_selection" in module.NEEDS:
            from sweep.engine.lag_selection import lag_selection

            if frames["baseline"].empty:
                raise InputFault(Fault("lag selection", "the baseline has not been run yet"))
            specification = str(frames["baseline"]["specification"].iloc[0])
            path = None if data is None else Path(data)
            frames["lag_selection"] = lag_selection(self, number, specification, path)
        table = module.build(frames, self._context(number, frames))
        if module is long_list:
            table = replace(table, stream=partial(self._long_list, number))
        table = table.with_stars() if stars else table
        return table.first(rows)

    def _long_list(self, number: int) -> Iterator[tuple[Any, ...]]:
        """Yield the cells of every row of a finding's long list."""
        from sweep.report.tables.long_list import reader

        with self._open() as database:
            yield from map(
                reader(read.LIST_COLUMNS), read.list_rows(database, self.sweep, number)
            )

    def content(self) -> ReportContent:
        """Return everything that the report and the summary are made from."""
        from sweep.report.content import FRAMES, content_of

        records = [self._record(int(n)) for n in self.findings["finding"]]
        with self._open() as database:
            frames = {
                int(record["finding"]): self._read_frames(database, int(record["finding"]), FRAMES)
                for record in records
            }
        note = json.loads(str(self.info["data_note"]))
        same = note.pop("same numbers", [])
        info = {**self.info, "data_note": json.dumps(note, ensure_ascii=False)}
        ruled = []
        for record in records:
            lost = frames[int(record["finding"])]["attrition"]
            for row in lost[lost["ruled"].fillna(False).astype(bool)].itertuples():
                ruled.append(f"{record['name']}: {row.rows:,} specifications, because {row.reason}")
        content = content_of(info, records, frames, ruled_out=ruled)
        return replace(content, redundancies=tuple(same), unfinished=self.unfinished)

    def summary(self, content: ReportContent | None = None) -> list[tuple[str, list[str]]]:
        """Return, for each finding, its statement and the sentences that sum it up.

        Parameters
        ----------
        content : ReportContent or None
            What :meth:`content` returned, where it is at hand; read anew if None.
        """
        from sweep.report.content import answered, summary

        return [
            (
                found.context.statement,
                [found.reproduction.sentence, *summary(found), *answered(found)],
            )
            for found in (content or self.content()).findings
        ]

    def report(
        self,
        output: str | Path | None = None,
        *,
        content: ReportContent | None = None,
        library: Library | None = None,
    ) -> Path:
        """Write the report as one self-contained HTML file and return its path.

        Parameters
        ----------
        output : str, Path or None
            HTML file; beside the store if none is given.
        content : ReportContent or None
            What :meth:`content` returned, where it is at hand; read anew if None.
        library : Library or None
            The drawing library, where it is being fetched already.

        Raises
        ------
        InputFault
            If the file cannot be written, or there is one that is no HTML page.
        """
        from sweep.report.page import page
        from sweep.writing import may_replace, write_whole

        target = Path(output) if output is not None else self.store.with_suffix(".html")
        own = self.own_files()
        may_replace(target, "html", own=own)
        text = page(content or self.content(), library=library)
        return write_whole(target, text, "html", own=own)

    def own_files(self) -> list[Path]:
        """Return the files that the results come from, as far as they are known."""
        file = Path(json.loads(str(self.info["data_note"]))["file"])
        return [
            self.store, self.store.with_suffix(".toml"), self.store.parent / file, file.absolute(),
        ]  # fmt: skip

    def compare(self, other: Results | None = None, *, finding: str | None = None) -> Comparison:
        """Set this sweep beside another one, or its own moving windows side by side.

        Parameters
        ----------
        other : Results or None
            Another sweep, of this store or of another one; None for the moving windows of
            this sweep, set side by side by their last date.
        finding : str or None
            Name of one finding; None for all.

        Raises
        ------
        InputFault
            If there is nothing to compare.
        """
        from sweep.comparison import compare_sweeps, compare_windows

        for results in (self, other or self):
            results._open().close()  # refuses a sweep of which nothing is stored
        if other is None:
            return compare_windows(self, finding)
        return compare_sweeps(self, other, finding)

    def export(self, folder: str | Path, only: str | None = None) -> list[Path]:
        """Write outcomes, survival, details and choices into a folder; return the files.

        Parameters
        ----------
        folder : str or Path
            Made where it does not exist.
        only : str or None
            ``parquet`` or ``csv``; None for both.

        Raises
        ------
        InputFault
            If the folder cannot be written into, or holds files of these names that are not
            such exports.
        """
        from store.export import FORMATS, export, targets
        from sweep.writing import may_replace, usable_folder

        if only is not None and only not in FORMATS:
            raise InputFault(Fault("only", f'"{only}" is no format' + suggestion(only, FORMATS)))
        formats = FORMATS if only is None else (only,)
        if not str(folder):
            raise InputFault(Fault("folder", "the name is empty", "Name a folder."))
        with self._open() as database:
            place = usable_folder(Path(folder))
            for path, kind in targets(place, formats):
                may_replace(path, kind, own=self.own_files())
            return export(database, self.sweep, place, formats)

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

    def explain(
        self,
        specification: str = "baseline",
        finding: str | int | None = None,
        data: str | Path | None = None,
    ) -> Explanation:
        """Return one specification in full, recomputed by the slow path.

        Parameters
        ----------
        specification : str
            Its id or a unique beginning of it, or ``baseline``.
        finding : str, int or None
            Needed where two findings share the specification; the first for ``baseline``.
        data : str, Path or None
            Data file, where it is no longer where the plan says.

        Raises
        ------
        store.errors.NotFound, store.errors.Ambiguous
            If no or more than one specification answers.
        InputFault
            If the data are gone or have changed.
        """
        from sweep.engine.explain import explain

        return explain(self, specification, finding, None if data is None else Path(data))

    def verify(
        self,
        rows: int = 200,
        seed: int = 0,
        data: str | Path | None = None,
        tolerance: float = 1e-8,
        progress: Callable[[int, int], None] | None = None,
    ) -> Verification:
        """Recompute a sample of rows by least squares on their rows and by statsmodels.

        Parameters
        ----------
        rows : int
            Rows to check; more where every choice, and every way in which rows end, needs more.
        seed : int
            The same seed draws the same rows.
        data : str, Path or None
            Data file, where it is no longer where the plan says.
        tolerance : float
            Largest relative difference allowed; see :mod:`sweep.engine.verify`.
        progress : callable or None
            Called with the rows done and all rows, now and then.

        Raises
        ------
        InputFault
            If the data are gone or have changed.
        """
        from sweep.engine.verify import verify

        self._open().close()  # refuses a sweep of which nothing is stored
        path = None if data is None else Path(data)
        return verify(self, rows, seed, path, tolerance, progress)

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
        raise NotFound(f'No finding is called "{finding}"' + suggestion(str(finding), names))

    def __repr__(self) -> str:
        lines = [f"Sweep {self.sweep} of {self.store.name}: {self.info['title']}"]
        lines += [self.unfinished] if self.unfinished else []
        for statement, sentences in self.summary() if self.info["rows"] else []:
            lines += [f"  {statement}", *(f"    {sentence}" for sentence in sentences)]
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        parts = [f"<p><strong>{html.escape(str(self.info['title']))}</strong></p>"]
        parts += [f"<p><strong>{self.unfinished}</strong></p>"] if self.unfinished else []
        for statement, sentences in self.summary() if self.info["rows"] else []:
            items = "".join(f"<li>{html.escape(sentence)}</li>" for sentence in sentences)
            parts.append(f"<p>{html.escape(statement)}</p><ul>{items}</ul>")
        return "".join(parts)
