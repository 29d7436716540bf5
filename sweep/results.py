"""Reading a store: the same verbs as the commands, frames out."""

from __future__ import annotations

import html
import json
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

from store import read
from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.stored_sweep import StoredSweep

if TYPE_CHECKING:
    import altair
    import pandas as pd

    from sweep.charts.context import Context
    from sweep.comparison import Comparison
    from sweep.engine.explain import Explanation
    from sweep.engine.verify import Verification
    from sweep.report.chart_files import DrawnChart
    from sweep.report.content import ReportContent
    from sweep.report.library import Library
    from sweep.report.tables import Table

__all__ = ["Results"]


class Results(StoredSweep):
    """One sweep of a store, and everything that can be made of it.

    Parameters, attributes and what is only read are those of
    :class:`sweep.stored_sweep.StoredSweep`.
    """

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
        from sweep.charts.context import context_of, frequency_of

        return context_of(
            self._record(number), frames["survival"], significance=float(self.info["significance"]),
            title=str(self.info["title"]), design=str(self.info["design"]),
            frequency=frequency_of(self.info),
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
        context = self._context(number, frames)
        table = module.build(frames, context).dated(context.frequency)
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
