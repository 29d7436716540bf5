"""A chart as files: pictures, an interactive page, its values, the numbers behind it, its words."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from sweep.charts import CHARTS, chart, numbers, render
from sweep.charts.theme import WIDTHS
from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.verdicts.words import joined

from .tables.model import Column, Kind, Table
from .tables.writers import as_csv

if TYPE_CHECKING:
    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["FORMATS", "DrawnChart", "contents", "draw_chart", "frame_csv", "targets"]


@dataclass(frozen=True, slots=True)
class DrawnChart:
    """A chart with all that its files say.

    Attributes
    ----------
    name, question : str
        As the chart names itself.
    title, statement : str
        Title of the plan, and the claim as a sentence without its full stop.
    plain : dict
        The chart as plain values.
    numbers : DataFrame
        What it is drawn from, nothing thinned.
    words : str
        The text alternative.
    """

    name: str
    question: str
    title: str
    statement: str
    plain: dict[str, Any]
    numbers: pd.DataFrame
    words: str


def draw_chart(
    name: str,
    frames: Mapping[str, pd.DataFrame],
    context: Context,
    width: str,
    options: Mapping[str, Any],
) -> DrawnChart:
    """Draw a chart of one finding with its numbers and words.

    Parameters
    ----------
    name : str
        A key of ``CHARTS``.
    frames : mapping of str to DataFrame
        Those that the chart needs.
    context : Context
        The finding, its level and counts.
    width : str
        ``narrow`` or ``wide``.
    options : mapping
        What was given beside; None where nothing was.  A text under ``axes`` holds names joined
        by commas.

    Raises
    ------
    InputFault
        If the width is unknown, or the chart takes no such option.
    """
    if width not in WIDTHS:
        raise InputFault(Fault("width", f'no width "{width}"' + suggestion(width, WIDTHS)))
    module = chart(name)
    given = {key: value for key, value in options.items() if value is not None}
    known = getattr(module, "OPTIONS", ())
    for key in given:
        if key not in known:
            others = [one for one in CHARTS if key in getattr(chart(one), "OPTIONS", ())]
            mend = f'"{joined(others)}" does.' if others else ""
            raise InputFault(Fault(key, f'the chart "{name}" takes none', mend))
    if isinstance(given.get("axes"), str):
        given["axes"] = tuple(part.strip() for part in given["axes"].split(","))
    return DrawnChart(
        name,
        module.QUESTION,
        context.title,
        context.statement,
        module.build(frames, context, width, **given),
        numbers(name, frames, context, **given),
        module.describe(frames, context, **given),
    )


def _values(drawn: DrawnChart) -> bytes:
    """Return the chart in the language of its values, which other programs draw too."""
    version = render.language_version()
    schema = f"https://vega.github.io/schema/vega-lite/v{version}.json"
    values = {"$schema": schema, "description": drawn.words, **drawn.plain}
    return (json.dumps(values, ensure_ascii=False, indent=1, allow_nan=False) + "\n").encode()


def _page(drawn: DrawnChart) -> bytes:
    from .chart_page import chart_page

    return chart_page(drawn).encode()


# Ending of a file, and how a chart is written into it.
FORMATS: dict[str, Callable[[DrawnChart], bytes]] = {
    "svg": lambda drawn: render.svg(drawn.plain).encode(),
    "pdf": lambda drawn: render.pdf(drawn.plain),
    "png": lambda drawn: render.png(drawn.plain),
    "html": _page,
    "json": _values,
    "csv": lambda drawn: frame_csv(drawn.numbers).encode(),
    "txt": lambda drawn: f"{drawn.question}\n\n{drawn.words}\n".encode(),
}


def targets(
    output: Path | None, formats: Sequence[str], default: Path
) -> dict[Path, str]:
    """Return which files are to be written, and how.

    Parameters
    ----------
    output : Path or None
        File that was named; ``default`` with an ending where none was.
    formats : sequence of str
        Keys of ``FORMATS``, or ``all``; where none is given, the ending of ``output`` decides.
    default : Path
        Path without an ending.

    Raises
    ------
    InputFault
        If a format is unknown, or nothing says which one is meant.
    """
    wanted = list(dict.fromkeys(formats))
    if "all" in wanted:
        wanted = list(FORMATS)
    unknown = [name for name in wanted if name not in FORMATS]
    if unknown:
        every = (*FORMATS, "all")
        raise InputFault(
            *(Fault("format", f'no format "{one}"' + suggestion(one, every)) for one in unknown)
        )
    if output is None:
        output = default
        wanted = wanted or ["svg"]
    ending = output.suffix.lower().removeprefix(".")
    if not wanted:
        if ending not in FORMATS:
            known = ", ".join(FORMATS)
            message = f"its ending does not say how to write the chart (known: {known})"
            mend = "Give another ending, or say it with --format."
            raise InputFault(Fault(str(output), message, mend))
        return {output: ending}
    # What stands before a known ending is the name; any other full stop belongs to it.
    stem = output.with_suffix("") if ending in FORMATS else output
    return {stem.with_name(f"{stem.name}.{name}"): name for name in wanted}


def contents(drawn: DrawnChart, files: Mapping[Path, str]) -> dict[Path, bytes]:
    """Return what goes into each file; nothing is written."""
    return {path: FORMATS[name](drawn) for path, name in files.items()}


def frame_csv(frame: pd.DataFrame) -> str:
    """Write a frame as CSV in full precision; texts cannot run as formulas in a spreadsheet."""
    columns = tuple(Column(str(name), _kind(frame[name]), str(name)) for name in frame.columns)
    rows = tuple(tuple(row) for row in frame.astype(object).itertuples(index=False, name=None))
    return as_csv(Table("numbers", "", columns, rows))


def _kind(values: pd.Series) -> Kind:
    from pandas.api import types

    held = values.dropna()
    if types.is_bool_dtype(values) or (len(held) and all(isinstance(v, bool) for v in held)):
        return "mark"
    if types.is_integer_dtype(values):
        return "count"
    if types.is_float_dtype(values):
        return "number"
    return "date" if types.is_datetime64_any_dtype(values) else "text"
