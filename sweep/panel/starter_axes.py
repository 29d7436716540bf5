"""The axes of a starter plan: what a careful referee would accept for the data, with reasons.

Each function returns the lines of comment and the entries, as TOML, of one axis.
"""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Mapping

from sweep.panel.survey import Survey, rows_needed

__all__ = [
    "YEARLY",
    "Entries",
    "baseline_scale",
    "conditioning_axis",
    "deterministic_axis",
    "lag_axis",
    "lag_rule",
    "procedure_axis",
    "quoted",
    "scale_text",
    "transformation_axis",
    "window_axis",
    "yearly_scale",
]  # fmt: skip

Entries = tuple[list[str], list[str]]

# Up to a year, for quarterly data two: common practice, no source.
LAGS = {
    "annual": (1, 2, 3),
    "quarterly": (1, 2, 3, 4, 6, 8),
    "monthly": (1, 2, 3, 6, 9, 12),
    "weekly": (1, 2, 4, 8),
    "business daily": (1, 2, 3, 5, 10),
    "daily": (1, 2, 3, 7, 14),
}
# Lags that a moving window must be able to carry.
WINDOW_LAGS = {
    "annual": 2, "quarterly": 4, "monthly": 6, "weekly": 4, "business daily": 5, "daily": 7,
}  # fmt: skip
FEWEST, MOST = 12, 30
"""Positions of one moving window: enough to see a path, and few enough to stay moderate."""
MODERATE = 20_000
"""Specifications that a starter plan stays near where the fewest positions allow it."""
LARGEST_SEASON = 12
USUAL, GROWTH, YEARLY = "as usual for each", "growth where positive", "changes on the year"


def quoted(text: str) -> str:
    """Write text as a basic string of TOML, whose escapes are those of JSON."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def lag_rule(found: Survey) -> tuple[str, list[str]]:
    """Return the baseline's criterion and the reason."""
    source = "(Ivanov & Kilian 2005, judged by impulse responses)"
    if found.frequency.name == "monthly":
        return "AIC", [f"AIC for monthly data {source}"]
    if found.frequency.name == "quarterly" and found.rows < 120:
        return "BIC", [f"BIC for quarterly data of fewer than 120 rows {source}"]
    if found.frequency.name == "quarterly":
        return "HQ", [f"HQ for quarterly data of 120 rows and more {source}"]
    if found.rows < 120:
        return "BIC", ["sparing with lags where rows are few (common practice, no source)"]
    return "HQ", ["between the sparing BIC and the generous AIC (common practice, no source)"]


def lag_axis(found: Survey) -> Entries:
    """Return fixed orders that the sample can carry, beside rules that choose one."""
    series = len(found.series)
    terms = _terms(found)
    known = LAGS[found.frequency.name]
    orders = [p for p in known if p == 1 or found.rows >= rows_needed(series, p, terms)]
    reason = [
        "fixed orders that leave three rows a coefficient, so that none is picked by hand, and",
        f"rules that choose among 1 to {found.frequency.criterion_maximum} "
        "(common practice, no source)",
    ]
    return reason, [*(str(order) for order in orders), '"AIC"', '"BIC"', '"HQ"']


def deterministic_axis(found: Survey) -> Entries:
    """Return the terms, the baseline's first."""
    plain = ['"constant"', '"linear trend"']
    step = f'(a level shift: {{ trend = "constant", steps = ["{found.after}"] }})'
    drift = "with and without drift in the scale used (common practice, no source)"
    if not _room_for_season(found):
        return [drift, step], plain
    season = '{ trend = "constant", seasonal = true }'
    if not found.seasonal:
        none = "the season in case the data are not adjusted: no pattern was found in their changes"
        return [drift, none, step], [*plain, season]
    names = ", ".join(found.seasonal)
    pattern = f"seasonal patterns (F test of the changes, 0.1%): {printable(names)}"
    both = '{ trend = "linear trend", seasonal = true }'
    return [pattern, drift, step], [season, both, '"constant"']


def _room_for_season(found: Survey) -> bool:
    seasons = found.frequency.seasons
    enough = found.rows >= rows_needed(len(found.series), 1, 1 + seasons)
    return 1 < seasons <= LARGEST_SEASON and enough


def _terms(found: Survey) -> int:
    """Return the deterministic terms that most specifications have."""
    seasonal = found.seasonal and _room_for_season(found)
    return 1 + found.frequency.seasons if seasonal else 2


def window_axis(found: Survey) -> Entries:
    """Return the full sample, its halves and moving windows with room for their lags."""
    series = len(found.series)
    windows, reasons = ['"full sample"'], ["the full sample"]
    if found.rows // 2 >= rows_needed(series, 1, _terms(found)):
        windows += [
            f'{{ name = "earlier half", until = "{found.middle}" }}',
            f'{{ name = "later half", from = "{found.after}" }}',
        ]
        reasons.append("each half alone")
    lengths = _rolling_lengths(found)
    wanted = _positions(found, len(windows), len(lengths))
    for length in lengths:
        step = max(1, -(-(found.rows - length) // wanted))
        windows.append(f"{{ rolling = {length}, step = {step} }}")
    if lengths:
        units = " and ".join(str(length) for length in lengths)
        reasons.append(f"moving windows of {units} {found.frequency.unit}s")
    told = f"{', '.join(reasons[:-1])} and {reasons[-1]}" if len(reasons) > 1 else reasons[0]
    words = [told]
    if lengths:
        words.append(
            "(no length is right for all data, so sweep several; a smaller step shows more and "
            "takes longer; common practice, no source)"
        )
    words += [
        "add what your readers will think of: an episode left out, a change that ends a regime",
        f'# {{ name = "without the episode", without = ["{found.before}", "{found.onwards}"], '
        'because = "…" },',
        f'# {{ name = "up to the change", until = "{found.onwards}", because = "…" }},',
    ]
    return words, windows


def _positions(found: Survey, fixed: int, moving: int) -> int:
    """Return the positions of a moving window that keep the plan moderate."""
    if not moving:
        return 0
    others = 1 + bool(found.given) + (len(found.given) if len(found.given) > 1 else 0)
    for axis in (lag_axis, deterministic_axis, transformation_axis, procedure_axis):
        others *= len(axis(found)[1])
    return min(max((MODERATE // others - fixed) // moving, FEWEST), MOST)


def _rolling_lengths(found: Survey) -> list[int]:
    """Return up to two lengths in whole years, neither of them most of the sample."""
    year = {"weekly": 52, "business daily": 260}.get(
        found.frequency.name, found.frequency.year or 1
    )
    series, top, terms = len(found.series), 3 * found.rows // 4, _terms(found)
    lags = WINDOW_LAGS[found.frequency.name]
    # Where there is no room for all lags that are wanted, room for two will have to do.
    least = next((n for p in (lags, 2) if (n := rows_needed(series, p, terms)) <= top), 0)
    if not least:
        return []
    lengths = []
    for share in (3, 5):  # three and five tenths of the sample
        wanted = max(share * found.rows // 10, least)
        length = -(-wanted // year) * year if 4 * year <= wanted else wanted
        if length <= top:
            lengths.append(length)
    return sorted(set(lengths))


def scale_text(scales: Mapping[str, str], name: str) -> str:
    """Write the transformation of each series: one for all, or a named table with exceptions."""
    counted = Counter(scales.values())
    default = counted.most_common(1)[0][0]
    others = {series: scale for series, scale in scales.items() if scale != default}
    if not others:
        return quoted(default)
    pairs = ", ".join(f"{quoted(series)} = {quoted(scale)}" for series, scale in others.items())
    return f"{{ name = {quoted(name)}, default = {quoted(default)}, series = {{ {pairs} }} }}"


def transformation_axis(found: Survey) -> Entries:
    """Return the scales, the baseline's first."""
    growth = {name: _change(found, name) for name in found.series}
    plain = dict.fromkeys(found.series, "difference")
    choices = [baseline_scale(found), scale_text(growth, GROWTH), scale_text(plain, GROWTH)]
    reason = ["also growth rates of all that is positive, and plain changes of all"]
    yearly = yearly_scale(found)
    if yearly:
        choices.append(yearly)
        reason[0] += ", and changes on the year"
    if any(found.traits[name].wanders for name in found.series):
        reason[0] += (
            "; no levels of series that wander, where F and chi-square are not the law of these "
            "tests (Sims, Stock & Watson 1990, Toda & Phillips 1993)"
        )
    # Two that say the same under different names are one; the first name stays.
    different: dict[str, str] = {}
    for choice in choices:
        different.setdefault(choice.partition("default")[2] or choice, choice)
    return reason, list(different.values())


def baseline_scale(found: Survey) -> str:
    """Return the scale that a careful author would start from."""
    return scale_text({name: found.traits[name].scale for name in found.series}, USUAL)


def _change(found: Survey, name: str) -> str:
    return "log difference" if found.traits[name].positive else "difference"


def yearly_scale(found: Survey) -> str:
    """Return changes on the year, empty where the frequency has none or the sample no room."""
    year = found.frequency.year
    series = len(found.series)
    if year not in {4, 12} or found.rows < year + rows_needed(series, year):
        return ""
    scales = {
        name: "yearly growth" if found.traits[name].positive else "seasonal difference"
        for name in found.series
    }
    return scale_text(scales, YEARLY)


def procedure_axis(found: Survey) -> Entries:
    """Return the plain test and one that allows errors of unequal variance."""
    reason = [
        "the plain form, and one that allows errors of unequal variance; HC3 holds its size",
        "best in samples below 250 (MacKinnon & White 1985, Long & Ervin 2000)",
    ]
    return reason, ['"F"', '{ test = "F", covariance = "HC3" }']


def conditioning_axis(found: Survey) -> Entries:
    """Return the conditioning sets, none where nothing is given."""
    choices = ['"given"'] if found.given else []
    if found.given:
        choices.append('"pairwise"')
    if len(found.given) > 1:
        choices.append('"leave one out"')
    reason = "a series left out can make one lead another, or hide it (Lütkepohl 1982)"
    return [reason], choices


def printable(text: str) -> str:
    """Keep a text from the file on one comment line."""
    return "".join(letter if letter.isprintable() else " " for letter in text)
