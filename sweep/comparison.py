"""Two sweeps side by side, or the moving windows of one: frames, sentences, figures, a page."""

from __future__ import annotations

import html
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from store import read, read_compare
from store.database import open_reading
from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.verdicts.comparison import pair_sentences, window_sentences
from sweep.verdicts.rolling import episodes
from sweep.writing import write_whole

if TYPE_CHECKING:
    import altair
    import pandas as pd

    from sweep.report.tables import Table
    from sweep.results import Results

__all__ = ["Comparison", "compare_sweeps", "compare_windows"]


@dataclass(frozen=True)
class Comparison:
    """What differs, for each finding.

    Attributes
    ----------
    title : str
        What is compared, in words.
    names : tuple of str
        How the two sides are called; empty where windows of one sweep are compared.
    remarks : tuple of str
        Sentences on both sides as a whole: levels, claims, data.
    summary : tuple of (str, tuple of str)
        For each finding its name and the sentences that sum up what differs.
    frames : dict of str to DataFrame
        Every frame with a first column ``finding``.  Of sweeps: ``counts``, ``verdicts``,
        ``changed``, ``p_values``, ``survival`` (``my_…`` is of the first sweep, ``their_…``
        of the second) and ``data`` (values that differ, by series and date).  Of windows:
        ``paths``, ``pairs``, ``episodes``.
    """

    title: str
    names: tuple[str, ...]
    remarks: tuple[str, ...]
    summary: tuple[tuple[str, tuple[str, ...]], ...]
    frames: dict[str, pd.DataFrame]
    _drawn: dict[str, list[tuple[dict[str, Any], str]]] = field(default_factory=dict, repr=False)
    _tables: dict[str, list[Table]] = field(default_factory=dict, repr=False)
    _shared: tuple[Table, ...] = ()

    def frame(self, name: str) -> pd.DataFrame:
        """Return one frame by name.

        Raises
        ------
        InputFault
            If there is none of that name.
        """
        if name not in self.frames:
            raise InputFault(
                Fault("part", f'there is no part "{name}" here' + suggestion(name, self.frames))
            )
        return self.frames[name]

    def chart(self, finding: str | None = None) -> altair.LayerChart:
        """Return the figure of a finding, of the first if none is named."""
        from sweep.charts.render import altair_chart

        plain, words = self._of(self._drawn, finding)[0]
        return altair_chart({**plain, "description": words})

    def tables(self, finding: str | None = None) -> list[Table]:
        """Return the tables of a finding, of the first if none is named."""
        return list(self._of(self._tables, finding))

    def _of(self, held: Mapping[str, list[Any]], finding: str | None) -> list[Any]:
        name = finding if finding is not None else next(iter(held), "")
        if name not in held:
            raise InputFault(
                Fault("finding", f'no finding is called "{name}" here' + suggestion(name, held))
            )
        return held[name]

    def report(self, path: str | Path) -> Path:
        """Write the comparison as one self-contained HTML page and return its path."""
        from sweep.charts.render import svg
        from sweep.report.comparison_page import comparison_page

        drawn = {
            name: [(svg(plain), words) for plain, words in figures]
            for name, figures in self._drawn.items()
        }
        text = comparison_page(
            self.title, self.remarks, self.summary, drawn, self._tables, self._shared
        )
        return write_whole(Path(path), text, "html")

    def __repr__(self) -> str:
        lines = [self.title, *self.remarks]
        for name, sentences in self.summary:
            lines += [f"{name}:", *(f"  {sentence}" for sentence in sentences)]
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        parts = [f"<p><strong>{html.escape(self.title)}</strong></p>"]
        parts += [f"<p>{html.escape(remark)}</p>" for remark in self.remarks]
        for name, sentences in self.summary:
            items = "".join(f"<li>{html.escape(sentence)}</li>" for sentence in sentences)
            parts.append(f"<p>{html.escape(name)}</p><ul>{items}</ul>")
        return "".join(parts)


def _named(mine: Results, theirs: Results) -> tuple[str, str]:
    """Return how two sweeps are called: by file, by number, or by both."""
    if mine.store.resolve() == theirs.store.resolve():
        return f"sweep {mine.sweep}", f"sweep {theirs.sweep}"
    names = [mine.store.stem, theirs.store.stem]
    if names[0] == names[1]:
        names = [f"{one.store.parent.name}/{one.store.stem}" for one in (mine, theirs)]
    return names[0], names[1]


def compare_sweeps(mine: Results, theirs: Results, finding: str | None = None) -> Comparison:
    """Set two sweeps side by side, of one store or of two.

    Rows are matched by what a specification means, never by the data, so that vintages of
    the data can be compared.

    Parameters
    ----------
    mine, theirs : Results
        First and second sweep.
    finding : str or None
        Name of one finding in the first sweep; None for all that both have.

    Raises
    ------
    InputFault
        If the sweeps share no finding, or both are the same sweep.
    """
    names = _named(mine, theirs)
    if mine.store.resolve() == theirs.store.resolve() and mine.sweep == theirs.sweep:
        problem = f"both sides are sweep {mine.sweep} of one store"
        raise InputFault(Fault("compare", problem, "Name another sweep with --against."))
    with read_compare.sides(mine.store, mine.sweep, theirs.store, theirs.sweep) as both:
        pairs = read_compare.paired(both)
        every = both.my_findings.set_index("finding")["name"].astype(str)
        if finding is not None:
            if finding not in set(every):
                known = suggestion(finding, list(every))
                raise InputFault(Fault("finding", f'no finding is called "{finding}"' + known))
            pairs = [pair for pair in pairs if every[pair[0]] == finding]
        if not pairs:
            raise InputFault(
                Fault("compare", f"{names[0]} and {names[1]} share no finding: cause, effect, "
                      "given and exogenous series must be the same")
            )  # fmt: skip
        found = {
            every[left]: read_compare.compare_frames(both, left, right) for left, right in pairs
        }
    data, data_words = _data_differences(mine, theirs, names)
    return _gathered(mine, theirs, names, found, data, data_words)


def _gathered(
    mine: Results,
    theirs: Results,
    names: tuple[str, str],
    found: Mapping[str, Mapping[str, pd.DataFrame]],
    data: pd.DataFrame | None,
    data_words: Sequence[str],
) -> Comparison:
    """Put frames, sentences, figures and tables of every finding together."""
    from sweep.charts import p_values
    from sweep.charts.context import claim_sentence
    from sweep.report import side_by_side as tables

    claims = {str(row["name"]): row for row in mine.findings.to_dict("records")}
    levels = float(mine.info["significance"]), float(theirs.info["significance"])
    summary, drawn, laid = [], {}, {}
    for name, frames in found.items():
        statement = claim_sentence({str(key): value for key, value in claims[name].items()})
        summary.append((name, tuple(pair_sentences(frames, names))))
        plain = p_values.build(frames, names, statement, levels)
        drawn[name] = [(plain, p_values.describe(frames, names, statement))]
        counts = frames["counts"].iloc[0]
        changed = frames["changed"]
        total = int(counts["changed"])
        laid[name] = [
            tables.survival_table(frames["survival"], names, name),
            tables.verdicts_table(frames["verdicts"], names, name),
            tables.changed_table(changed, names, name, total),
        ]
    joined = {part: _with_finding(found, part) for part in next(iter(found.values()))}
    shared = []
    if data is not None:
        joined["data"] = data
        shared.append(tables.data_table(data, names))
    remarks = [*_remarks(mine, theirs, names, list(found)), *data_words]
    title = f"{names[0]} and {names[1]} side by side"
    return Comparison(title, names, tuple(remarks), tuple(summary), joined, drawn, laid,
                      tuple(shared))  # fmt: skip


def _with_finding(
    found: Mapping[str, Mapping[str, pd.DataFrame]], part: str
) -> pd.DataFrame:
    """Join one frame of every finding, the finding's name first."""
    import pandas as pd

    frames = []
    for name, held in found.items():
        frame = held[part].copy()
        frame.insert(0, "finding", name)
        frames.append(frame)
    return pd.concat(frames, ignore_index=True)


def _remarks(
    mine: Results, theirs: Results, names: tuple[str, str], shared: list[str]
) -> list[str]:
    """Say what differs between the sweeps as a whole."""
    from sweep.verdicts.words import joined, level_text

    said = []
    levels = [float(one.info["significance"]) for one in (mine, theirs)]
    if levels[0] != levels[1]:
        said.append(
            f"The levels differ: {level_text(levels[0])} in {names[0]}, {level_text(levels[1])} in "
            f"{names[1]}; each row is judged by the level of its own sweep."
        )
    alone = [name for name in mine.findings["name"].astype(str) if name not in shared]
    if alone:
        said.append(f"Findings without a counterpart in {names[1]}: {joined(alone)}.")
    roles = ["cause", "effect", "given", "exogenous"]
    claims = ["claim", "sign", "reverse_sign"]
    both = mine.findings.merge(theirs.findings, on=roles, suffixes=("_my", "_their"))
    for row in both.to_dict("records"):
        if any(row[f"{key}_my"] != row[f"{key}_their"] for key in claims):
            said.append(
                f"“{row['name_my']}” makes another claim in {names[1]}; each row is judged by the "
                "claim of its own sweep."
            )
    if mine.info["numerics"] != theirs.info["numerics"]:
        said.append("The two sweeps were computed by different versions of the numerical rules.")
    return said


def _data_differences(
    mine: Results, theirs: Results, names: tuple[str, str]
) -> tuple[pd.DataFrame | None, list[str]]:
    """Return the values that differ between the data of two sweeps, and what is to be said."""
    left, right = (
        set(zip(one.findings["data_high"], one.findings["data_low"], strict=True))
        for one in (mine, theirs)
    )
    if left == right:
        return None, ["Both sweeps were run on the same data."]
    from sweep.engine.stored import prepared_again

    held = []
    for one, name in ((mine, names[0]), (theirs, names[1])):
        try:
            held.append(prepared_again(one, None).dataset)
        except InputFault as fault:
            reason = fault.faults[0]
            return None, [
                f"The data differ, but by which values cannot be shown: the data of {name} are no "
                f"longer there as they were ({reason.place}: {reason.problem})."
            ]
    frame = _different_values(held[0], held[1])
    if frame.empty:
        return None, ["The data of the series that both use are the same; the rest differs."]
    dates = frame["date"].nunique()
    series = ", ".join(dict.fromkeys(frame["series"]))
    return frame, [f"The data differ in {len(frame):,} values of {series} at {dates:,} dates."]


def _different_values(mine: Any, theirs: Any) -> pd.DataFrame:
    """Return series, date and both values where two data sets differ."""
    import pandas as pd

    parts = []
    for name in mine.names:
        if name not in theirs.names:
            continue
        columns = [
            pd.Series(one.column(name), index=[one.calendar.label(i) for i in
                                               range(len(one.calendar))])
            for one in (mine, theirs)
        ]  # fmt: skip
        both = pd.concat(columns, axis=1, keys=["mine", "theirs"], sort=False)
        # NaN on both sides is no difference.
        unlike = both[~((both["mine"] == both["theirs"]) | both.isna().all(axis=1))]
        unlike = unlike.assign(series=name, date=unlike.index)
        parts.append(unlike)
    columns_out = ["series", "date", "mine", "theirs", "difference"]
    if not parts:
        return pd.DataFrame(columns=columns_out)
    frame = pd.concat(parts, ignore_index=True)
    frame["difference"] = frame["theirs"] - frame["mine"]
    return frame[columns_out].sort_values(["series", "date"], ignore_index=True)


def compare_windows(results: Results, finding: str | None = None) -> Comparison:
    """Set the moving windows of one sweep side by side on their last dates.

    Parameters
    ----------
    results : Results
        The sweep.
    finding : str or None
        Name of one finding; None for all.

    Raises
    ------
    InputFault
        If the sweep has no moving window, or no finding of that name.
    """
    from sweep.charts import episodes as chart
    from sweep.charts.context import context_of, frequency_of
    from sweep.report import side_by_side as tables
    from sweep.report.tables import TABLES

    records = {str(row["name"]): row for row in results.findings.to_dict("records")}
    if finding is not None and finding not in records:
        known = suggestion(finding, records)
        raise InputFault(Fault("finding", f'no finding is called "{finding}"' + known))
    chosen = [finding] if finding is not None else list(records)
    summary, drawn, laid = [], {}, {}
    found: dict[str, dict[str, pd.DataFrame]] = {}
    with open_reading(results.store) as database:
        for name in chosen:
            number = int(records[name]["finding"])
            paths = read_compare.window_paths(database, results.sweep, number)
            if paths.empty:
                raise InputFault(
                    Fault("compare", f'the sweep has no moving window for "{name}"',
                          "Name a second store, or add { rolling = … } to the windows.")
                )  # fmt: skip
            pairs = read_compare.window_pairs(database, results.sweep, number)
            survival = read.survival(database, results.sweep, number)
            runs = episodes(paths)
            context = context_of(
                {str(key): value for key, value in records[name].items()}, survival,
                significance=float(results.info["significance"]),
                title=str(results.info["title"]), design=str(results.info["design"]),
                frequency=frequency_of(results.info),
            )  # fmt: skip
            frames = {"window_paths": paths}
            found[name] = {"paths": paths, "pairs": pairs, "episodes": runs}
            summary.append((name, tuple(window_sentences(paths, pairs, runs))))
            drawn[name] = [(chart.build(frames, context), chart.describe(frames, context))]
            laid[name] = [
                TABLES["episodes"].build(frames, context).dated(context.frequency),
                tables.pairs_table(pairs, name),
            ]  # fmt: skip
    joined = {part: _with_finding(found, part) for part in ("paths", "pairs", "episodes")}
    title = f"Moving windows of sweep {results.sweep} side by side"
    remarks = (
        "Windows are set side by side by their last date. Neighbouring windows share most of "
        "their data, so runs of them are expected also where nothing changes.",
    )
    return Comparison(title, (), remarks, tuple(summary), joined, drawn, laid)
