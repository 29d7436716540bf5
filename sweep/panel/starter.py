"""A commented starter plan for a data file: what a careful referee would accept to begin with."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path

from sweep.panel.survey import Survey, rows_needed, survey_file

__all__ = ["starter_plan"]

_LAGS = {
    "annual": (1, 2, 3),
    "quarterly": (1, 2, 3, 4, 6, 8),
    "monthly": (1, 2, 3, 6, 9, 12),
    "weekly": (1, 2, 4, 8),
    "business daily": (1, 2, 3, 5, 10),
    "daily": (1, 2, 3, 7, 14),
}
_POSITIONS = 60  # rolling windows that a starter plan asks for, at most


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
    parts = [_head(path, found), _finding(found), _baseline(found), _axes(found), _tail()]
    return "\n".join(parts)


def _quoted(text: str) -> str:
    """Write text as a basic string of TOML, whose escapes are those of JSON."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _list(items: Sequence[str]) -> str:
    return f"[{', '.join(items)}]"


def _commented(text: str) -> str:
    """Keep a text from the file on one comment line."""
    return "".join(letter if letter.isprintable() else " " for letter in text)


def _head(path: Path, found: Survey) -> str:
    lines = [
        "# A starter plan, written from the data file.  Every line is yours to change:",
        "# put your own finding and your own reported choices in, then run it again.",
        f"title = {_quoted(f'Does {found.cause} lead {found.effect}?')}",
        "significance = 0.05            # survival is also shown at 1% and 10%",
        "seed = 1                       # any whole number; the same seed gives the same results",
        "",
        "[data]",
        f"file = {_quoted(path.name)}",
        f"date = {_quoted(found.date)}",
        f"frequency = {_quoted(found.frequency.name)}",
    ]
    if found.as_observed:
        lines.append('calendar = "as observed"       # the dates skip holidays')
    lines.append('source = "Say here where the data come from"')
    lines += [
        _commented(f"# Passed over: {name} ({reason})") for name, reason in found.unusable[:6]
    ]
    return "\n".join([*lines, ""])


def _finding(found: Survey) -> str:
    lines = [
        "[[findings]]",
        "# PUT YOUR OWN FINDING HERE.  The series below are only the first ones in the file:",
        "# the first is taken as the effect, the second as the cause, the rest as given.",
        f"name = {_quoted(f'{found.cause} leads {found.effect}')}",
        f"cause = {_quoted(found.cause)}",
        f"effect = {_quoted(found.effect)}",
        f"given = {_list([_quoted(name) for name in found.given])}",
        'claim = "leads"                # leads | leads one way | leads both ways | does not lead',
        '# sign = "positive"            # add it if your claim has a sign: positive | negative',
        "",
    ]
    return "\n".join(lines)


def _lag_rule(found: Survey) -> tuple[str, str]:
    """Baseline lag choice and its reason (Ivanov & Kilian 2005 for monthly and quarterly)."""
    if found.frequency.name == "monthly":
        return "AIC", "usual for monthly data (Ivanov & Kilian 2005)"
    if found.rows < 120:
        return "BIC", "sparing with lags in a sample below 120 rows"
    return "HQ", "between AIC and BIC, usual in samples of 120 rows and more"


def _logs(found: Survey, logged: str, plain: str) -> str:
    """Write a transformation that takes logs only of series that are always positive."""
    others = [name for name in found.series if name not in found.positive]
    if not others:
        return _quoted(logged)
    if len(others) == len(found.series):
        return _quoted(plain)
    pairs = ", ".join(f"{_quoted(name)} = {_quoted(plain)}" for name in others)
    return f"{{ default = {_quoted(logged)}, series = {{ {pairs} }} }}"


def _baseline(found: Survey) -> str:
    rule, why = _lag_rule(found)
    reason = "growth rates, since most level series wander; logs need positive values"
    if not found.positive:
        reason = "changes, since most level series wander; no logs, as values are not all positive"
    lines = [
        "[baseline]                     # the choices that you report, one for each axis",
        f"# {why}",
        f'lags = "{rule}"',
        'deterministics = "constant"',
        'window = "full sample"',
        f"# {reason}",
        f"transformation = {_logs(found, 'log difference', 'difference')}",
        "# keeps its size in small samples, where chi-square forms do not",
        'test = "F"',
        "",
    ]
    return "\n".join(lines)


def _lag_axis(found: Survey) -> list[str]:
    series = len(found.series)
    orders = [
        order for order in _LAGS[found.frequency.name] if found.rows >= rows_needed(series, order)
    ]
    return [*(str(order) for order in orders), '"AIC"', '"BIC"', '"HQ"']


def _window_axis(found: Survey) -> tuple[list[str], str]:
    windows = ['"full sample"']
    series = len(found.series)
    half = found.rows // 2
    reasons = ["the full sample"]
    if half >= rows_needed(series, 1):
        windows += [
            f'{{ name = "earlier half", until = "{found.middle}" }}',
            f'{{ name = "later half", from = "{found.after}" }}',
        ]
        reasons.append("each half alone")
    length = _rolling_length(found)
    if length:
        step = max(1, -(-(found.rows - length) // _POSITIONS))
        windows.append(f"{{ rolling = {length}, step = {step} }}")
        reasons.append(f"and moving windows of {length} {found.frequency.unit}s")
    return windows, ", ".join(reasons)


def _rolling_length(found: Survey) -> int:
    """Two fifths of the sample in whole years, enough for two lags; 0 if that is most of it."""
    year = {"weekly": 52, "business daily": 260}.get(
        found.frequency.name, found.frequency.year or 1
    )
    wanted = max(2 * found.rows // 5, rows_needed(len(found.series), 2))
    length = -(-wanted // year) * year if 4 * year <= wanted else wanted
    return length if 4 * length <= 3 * found.rows else 0


def _deterministic_axis(found: Survey) -> tuple[list[str], str]:
    terms, reason = ['"constant"', '"linear trend"'], "with and without drift in the scale used"
    seasons = found.frequency.seasons
    if 1 < seasons <= 12 and found.rows >= rows_needed(len(found.series), 1) + seasons:
        terms.append('{ trend = "constant", seasonal = true }')
        reason += "; the season in case the data are not adjusted"
    return terms, reason


def _transformation_axis(found: Survey) -> tuple[list[str], str]:
    choices = [_logs(found, "log difference", "difference"), '"difference"']
    reason = "growth and plain changes"
    year = found.frequency.year
    if year in {4, 12} and found.rows >= 4 * year + rows_needed(len(found.series), 1):
        choices.append(_logs(found, "yearly growth", "seasonal difference"))
        reason += f"; changes on the year overlap, so they want {year} lags or more"
    return list(dict.fromkeys(choices)), reason


def _axes(found: Survey) -> str:
    windows, window_reason = _window_axis(found)
    terms, term_reason = _deterministic_axis(found)
    scales, scale_reason = _transformation_axis(found)
    conditioning = ['"given"']
    if found.given:
        conditioning.append('"pairwise"')
    if len(found.given) > 1:
        conditioning.append('"leave one out"')
    lines = [
        "[axes]                         # every choice you would defend, the baseline's included",
        "# fixed orders that the sample can carry, beside rules that choose one",
        f"lags = {_list(_lag_axis(found))}",
        f"# {term_reason}",
        f"deterministics = {_list(terms)}",
        f"# {window_reason}",
        "# (leave an episode out with { without = [first, last] })",
        "windows = [",
        *(f"    {window}," for window in windows),
        "]",
        f"# {scale_reason}",
        "transformations = [",
        *(f"    {scale}," for scale in scales),
        "]",
        "# the plain form, and one that allows errors of unequal variance",
        'tests = ["F", { test = "F", covariance = "HC3" }]',
    ]
    if found.given:
        lines += [
            "# with all given series, with none, and with each left out",
            f"conditioning = {_list(conditioning)}",
        ]
    return "\n".join([*lines, ""])


def _tail() -> str:
    lines = [
        "[screens]",
        'require = ["enough observations"]   # a regression needs rows to spare',
        "",
        "[sweep]",
        'design = "full"                # every choice with every other',
        "",
    ]
    return "\n".join(lines)
