"""A commented starter plan for a data file: what a careful referee would accept to begin with."""

from __future__ import annotations

import textwrap
from pathlib import Path

from sweep.panel.starter_axes import (
    YEARLY,
    Entries,
    baseline_scale,
    conditioning_axis,
    deterministic_axis,
    lag_axis,
    lag_rule,
    printable,
    procedure_axis,
    quoted,
    transformation_axis,
    window_axis,
    yearly_scale,
)
from sweep.panel.survey import Survey, survey_file

__all__ = ["starter_plan"]

WIDTH = 96
NAMED = 6
"""Columns passed over that are named."""


def starter_plan(path: Path) -> str:
    """Return the text of a plan (TOML) for a data file, ready to run beside it.

    Parameters
    ----------
    path : Path
        A ``.csv``, ``.parquet`` or ``.xlsx`` file with a date column and at least two
        series.

    Raises
    ------
    InputFault
        If the file cannot be read, the date column or the frequency is not recognised,
        fewer than two series are usable, or there are too few rows for one lag.
    """
    found = survey_file(path)
    parts = [
        _head(path, found), _finding(found), _baseline(found), _axes(found), _rules(found), _tail()
    ]  # fmt: skip
    return "\n".join(part for part in parts if part)


def _head(path: Path, found: Survey) -> str:
    lines = [
        "# A starter plan, written from the data file.  Every line is yours to change:",
        "# put your own finding and your own reported choices in, then run it again.",
        f"title = {quoted(f'Does {found.cause} lead {found.effect}?')}",
        "significance = 0.05            # survival is also shown at 1% and 10%",
        "seed = 1                       # any whole number; the same seed gives the same results",
        "",
        "[data]",
        f"file = {quoted(path.name)}",
        f"date = {quoted(found.date)}",
        f"frequency = {quoted(found.frequency.name)}",
    ]
    if found.as_observed:
        lines.append('calendar = "as observed"       # the dates skip holidays')
    lines.append('source = "Say here where the data come from"')
    lines += [
        printable(f"# Passed over: {name} ({reason})") for name, reason in found.unusable[:NAMED]
    ]
    return "\n".join([*lines, ""])


def _finding(found: Survey) -> str:
    lines = [
        "[[findings]]",
        "# PUT YOUR OWN FINDING HERE.  The series below are only the first ones in the file:",
        "# the first is taken as the effect, the second as the cause, the rest as given.",
        f"name = {quoted(f'{found.cause} leads {found.effect}')}",
        f"cause = {quoted(found.cause)}",
        f"effect = {quoted(found.effect)}",
        f"given = [{', '.join(quoted(name) for name in found.given)}]",
        'claim = "leads"                # leads | leads one way | leads both ways | does not lead',
        '# sign = "positive"            # add it if your claim has a sign: positive | negative',
        "",
    ]
    return "\n".join(lines)


def _comment(text: str) -> list[str]:
    """Write a reason as lines of comment; what is commented out stays on one line."""
    if text.startswith("# "):
        return [text]
    return [f"# {line}" for line in textwrap.wrap(text, WIDTH)]


def _baseline(found: Survey) -> str:
    rule, reasons = lag_rule(found)
    _, terms = deterministic_axis(found)
    scales = {name: found.traits[name].scale for name in found.series}
    lines = [
        "[baseline]                     # the choices that you report, one for each axis",
        *(line for reason in reasons for line in _comment(reason)),
        f"lags = {quoted(rule)}",
        f"deterministics = {terms[0]}",
        'window = "full sample"',
        *_comment(_scale_reason(scales)),
        f"transformation = {baseline_scale(found)}",
        "# F keeps its size in small samples, where chi-square forms reject too often",
        'test = "F"',
        "",
    ]
    return "\n".join(lines)


def _scale_reason(scales: dict[str, str]) -> str:
    """Say what each kind of series gets and why."""
    words = {
        "log difference": "growth rates of series that wander and are well above zero or trend",
        "difference": "changes of series that wander, since some are not positive or are rates",
        "level": "levels of series that return to a mean or a trend",
    }
    held = [words[name] for name in words if name in scales.values()]
    rule = "(autocorrelation and sign of the values; common practice, no source)"
    return f"{'; '.join(held)} {rule}"


def _axis(key: str, entries: Entries, *, lines: bool = False) -> list[str]:
    """Write one axis below its reasons; nothing where it has no entries."""
    reasons, choices = entries
    if not choices:
        return []
    told = [line for reason in reasons for line in _comment(reason)]
    whole = f"{key} = [{', '.join(choices)}]"
    if len(whole) <= WIDTH and not lines:
        return [*told, whole]
    inside = [reason for reason in reasons if reason.startswith("# ")]
    told = [line for line in told if line not in inside]
    return [*told, f"{key} = [", *(f"    {choice}," for choice in choices),
            *(f"    {line}" for line in inside), "]"]  # fmt: skip


def _axes(found: Survey) -> str:
    lines = [
        "[axes]                         # every choice you would defend, the baseline's included",
        *_axis("lags", lag_axis(found)),
        *_axis("deterministics", deterministic_axis(found)),
        *_axis("windows", window_axis(found), lines=True),
        *_axis("transformations", transformation_axis(found), lines=True),
        *_axis("tests", procedure_axis(found)),
        *_axis("conditioning", conditioning_axis(found)),
    ]
    if found.alike:
        role = found.alike[0][1]
        names = [role, *(name for name, like in found.alike if like == role)]
        others = ", ".join(names[1:])
        lines += _comment(
            printable(f"{others} moves with {role}: if both measure one thing, sweep them too")
        )
        columns = ", ".join(quoted(name) for name in names)
        lines.append(f"# measures = {{ {quoted(role)} = [{columns}] }}")
    return "\n".join([*lines, ""])


def _rules(found: Survey) -> str:
    """Rule short lags out where changes overlap."""
    yearly = yearly_scale(found)
    if not yearly:
        return ""
    named = quoted(YEARLY) if yearly.startswith("{") else yearly
    year = found.frequency.year or 0
    short = [entry for entry in lag_axis(found)[1] if entry.isdigit() and int(entry) < year]
    lines = [
        "[[rule_out]]",
        f"when = {{ transformation = [{named}], lags = [{', '.join(short)}] }}",
        f'because = "changes on the year overlap for {year - 1} {found.frequency.unit}s"',
        "",
    ]
    return "\n".join(lines)


def _tail() -> str:
    lines = [
        "[screens]",
        "# three rows a coefficient and twenty to spare (common practice, no source)",
        'require = ["enough observations"]',
        "",
        "[sweep]",
        'design = "full"                # every choice with every other',
        "",
    ]
    return "\n".join(lines)
