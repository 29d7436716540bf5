"""Where the strips of the windows figure stand, and the dates below them."""

from __future__ import annotations

import datetime
import itertools
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from .layout import spread_evenly

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Strip", "day_number", "place_strips", "spans", "year_ticks"]

_EPOCH = datetime.date(1970, 1, 1)
_SMALLEST = 0.0006  # where p-values below 0.001 are gathered

_HEAD, _STRIP, _BAR, _PANEL, _GAP, _AFTER = 17.0, 15.0, 8.0, 58.0, 5.0, 8.0

# At most so many strips, and so many of them with a panel of p-values below.
_MOST, _MOST_PANELS = 16, 5


@dataclass(frozen=True, slots=True)
class Strip:
    """One window entry with its place.

    Attributes
    ----------
    name : str
        Label of the window entry.
    kind : str
        ``fixed``, ``rolling``, ``expanding`` or ``shrinking``.
    records : tuple of mapping
        Its positions in order of date.
    spans : tuple of (float, float)
        From–to of each position across, in days since 1970.
    top, bottom : float
        Pixels from the top of the view.
    panel : tuple of float
        Top and bottom of the panel of p-values; empty without one.
    """

    name: str
    kind: str
    records: tuple[dict[Any, Any], ...]
    spans: tuple[tuple[float, float], ...]
    top: float
    bottom: float
    panel: tuple[float, ...]

    @property
    def episodes(self) -> tuple[tuple[float, float], ...]:
        """Return the episodes that a fixed window leaves out, in days since 1970."""
        text = str(self.records[0].get("episodes") or "") if self.records else ""
        pairs = [part.split("/") for part in text.split(";") if part]
        return () if self.moving else tuple((day_number(a), day_number(b)) for a, b in pairs)

    @property
    def moving(self) -> bool:
        """Whether the entry has a path of positions."""
        return self.kind != "fixed"

    @property
    def positions(self) -> int:
        """Positions, pooled ones counted singly."""
        return sum(int(row.get("pooled", 1) or 1) for row in self.records)

    def day(self, span: tuple[float, float]) -> float:
        """Return the date of a position: its last day, or its first where windows shrink."""
        return span[0] if self.kind == "shrinking" else span[1]

    def y(self, p_value: float) -> float:
        """Return where a p-value stands in the panel: 1 at its top, below 0.001 at its edge."""
        top, bottom = self.panel
        part = math.log10(max(float(p_value), _SMALLEST)) / math.log10(_SMALLEST)
        return top + part * (bottom - top)


def day_number(value: Any) -> float:
    """Return a date as days since the first of January 1970."""
    day = datetime.date.fromisoformat(str(value)[:10])
    return float((day - _EPOCH).days)


def spans(kind: str, records: list[dict[Any, Any]]) -> list[tuple[float, float]]:
    """Return what each position covers across: the bar itself, or the step to its date.

    The step leads up to the last date of a window, so that no cell reaches past the data;
    shrinking windows, which all end alike, start at their first date.
    """
    if kind == "fixed":
        return [(day_number(r["window_start"]), day_number(r["window_end"])) for r in records]
    side = "window_start" if kind == "shrinking" else "window_end"
    days = [day_number(record[side]) for record in records]
    steps = sorted(after - before for before, after in itertools.pairwise(days))
    step = steps[len(steps) // 2] if steps else 30.0
    if kind == "shrinking":
        return list(zip(days, [*days[1:], days[-1] + step], strict=True))
    return list(zip([days[0] - step, *days[:-1]], days, strict=True))


def place_strips(frame: pd.DataFrame, top: float) -> tuple[list[Strip], float]:
    """Place the window entries below each other, moving ones first.

    Parameters
    ----------
    frame : DataFrame
        The store's frame ``windows`` of one finding.
    top : float
        Pixels above the first strip's name.

    Returns
    -------
    tuple
        The strips, and the pixels from the top of the view to the end of the last.
    """
    entries = []
    for name in frame["window_name"].drop_duplicates():
        rows = frame[frame["window_name"] == name]
        kind = str(rows["entry_kind"].iloc[0])
        side = "window_start" if kind == "shrinking" else "window_end"
        entries.append((str(name), kind, rows.sort_values(side).to_dict("records")))
    entries.sort(key=lambda entry: entry[1] == "fixed")
    entries = [entries[place] for place in spread_evenly(len(entries), _MOST)]
    moving = sum(kind != "fixed" for _, kind, _ in entries)
    strips: list[Strip] = []
    height = top
    for number, (name, kind, records) in enumerate(entries):
        start = height + _HEAD
        end = start + (_BAR if kind == "fixed" else _STRIP)
        panel: tuple[float, ...] = ()
        if kind != "fixed" and (moving <= _MOST_PANELS or number < _MOST_PANELS):
            panel = (end + _GAP, end + _GAP + _PANEL)
        strips.append(
            Strip(name, kind, tuple(records), tuple(spans(kind, records)), start, end, panel)
        )
        height = (panel[1] if panel else end) + _AFTER
    return strips, height


def year_ticks(low: float, high: float, most: int) -> list[tuple[float, str]]:
    """Return days and labels of at most so many round dates between two days.

    Parameters
    ----------
    low, high : float
        Days since 1970.
    most : int
        Most ticks to return.

    Examples
    --------
    >>> [text for _, text in year_ticks(day_number("1995-03-01"), day_number("2024-12-01"), 6)]
    ['2000', '2005', '2010', '2015', '2020']
    >>> [text for _, text in year_ticks(day_number("2020-02-01"), day_number("2020-07-15"), 9)]
    ['2020-02', '2020-03', '2020-04', '2020-05', '2020-06', '2020-07']
    """
    first = _EPOCH + datetime.timedelta(days=low)
    last = _EPOCH + datetime.timedelta(days=high)
    for months in (1, 3, 6, 12, 24, 60, 120, 240, 600, 1200):
        start = -(-(first.year * 12 + first.month - 1 + (first.day > 1)) // months) * months
        stop = last.year * 12 + last.month - 1
        places = range(start, stop + 1, months)
        if len(places) <= most:
            break
    found = []
    for place in places:
        day = datetime.date(place // 12, place % 12 + 1, 1)
        text = f"{day:%Y}" if months % 12 == 0 else f"{day:%Y-%m}"
        found.append((day_number(day), text))
    return found
