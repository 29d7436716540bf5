"""The rows of one regression built with pandas, from the data and the words of the plan.

For `verify`: nothing here calls the panel's transformations and windows, the kernels or the
tasks.  A value inside an episode left out is made missing in the raw series, so that whatever
uses it is missing too, through transformation or lag.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from sweep.engine.prepare import Prepared
from sweep.panel.periods import Frequency, parse_period
from sweep.plan.choices import (
    ConditioningChoice,
    DeterministicChoice,
    LagChoice,
    MeasureChoice,
    ProcedureChoice,
    TransformationChoice,
    WindowChoice,
)
from sweep.plan.model import Exogenous, Finding, scale_of

__all__ = [
    "CONSTANT", "OutsideChoices", "Panel", "Rows", "choices_of", "dates_there", "panel_of",
    "rows_of", "term_frame",
]  # fmt: skip

CONSTANT = "time^0"
CYCLE = "Hodrick-Prescott cycle"


@dataclass(frozen=True, slots=True)
class OutsideChoices:
    """What one specification chose, as the plan holds it.

    Attributes
    ----------
    finding : Finding
    lags, terms, window, scale, procedure : Choice
    given : tuple of str
        Roles conditioned on.
    columns : mapping of role to data column
    first, last : date
        First and last observation of its window, as stored.
    """

    finding: Finding
    lags: LagChoice
    terms: DeterministicChoice
    window: WindowChoice
    scale: TransformationChoice
    procedure: ProcedureChoice
    given: tuple[str, ...]
    columns: Mapping[str, str]
    first: pd.Timestamp
    last: pd.Timestamp

    @property
    def series(self) -> list[str]:
        """Roles that are modelled: effect, cause, given."""
        return [self.finding.effect, self.finding.cause, *self.given]


@dataclass(frozen=True, slots=True)
class Panel:
    """Transformed series of one specification within its window.

    Attributes
    ----------
    values : DataFrame, one column a role
        Missing where an episode left out reaches in.
    there : Series of bool
        Where every series exists, episodes disregarded.
    filtered_across : bool
        True where a filter of the whole window meets an episode.
    """

    values: pd.DataFrame
    there: pd.Series[bool]
    filtered_across: bool

    def begun(self, lost: int) -> pd.Series[bool]:
        """Say which rows lie ``lost`` rows or more after the first where every series exists."""
        place = pd.Series(range(len(self.there)), index=self.there.index)
        known = place[self.there]
        if known.empty:
            return place < 0
        return (place >= int(known.iloc[0]) + lost) & (place <= int(known.iloc[-1]))


@dataclass(frozen=True, slots=True)
class Rows:
    """The rows of one equation.

    Attributes
    ----------
    effect : Series, length T
    terms, nuisance, cause : DataFrame, T rows
        Deterministic terms; own, given and exogenous regressors; lags of the cause.
    current : DataFrame
        Values of the cause and the effect in the same rows.
    times : ndarray of int, shape (T,)
        Place of each row in the window, gaps counted.
    """

    effect: pd.Series[float]
    terms: pd.DataFrame
    nuisance: pd.DataFrame
    cause: pd.DataFrame
    current: pd.DataFrame
    times: NDArray[np.int64]

    @property
    def regressors(self) -> int:
        """Regressors k."""
        return self.terms.shape[1] + self.nuisance.shape[1] + self.cause.shape[1]

    @property
    def constant(self) -> bool:
        """Whether the terms hold a constant."""
        return CONSTANT in self.terms

    def right_hand_side(self) -> NDArray[np.float64]:
        """Return all regressors, the lags of the cause last, shape (T, k)."""
        return np.column_stack([self.terms, self.nuisance, self.cause])


def choices_of(
    prepared: Prepared, row: int, first: pd.Timestamp, last: pd.Timestamp
) -> OutsideChoices:
    """Return what a row of the plan's table chose; its window's dates come from the store."""
    plan, rows = prepared.plan, prepared.rows
    finding = plan.findings[int(rows.finding[row])]
    held = {axis: plan.axes[axis][int(codes[row])] for axis, codes in rows.codes.items()}
    lags, terms, window = held["lags"], held["deterministics"], held["window"]
    scale, procedure = held["transformation"], held["test"]
    conditioning, measure = held["conditioning"], held["measures"]
    assert isinstance(lags, LagChoice)
    assert isinstance(terms, DeterministicChoice)
    assert isinstance(window, WindowChoice)
    assert isinstance(scale, TransformationChoice)
    assert isinstance(procedure, ProcedureChoice)
    assert isinstance(conditioning, ConditioningChoice)
    assert isinstance(measure, MeasureChoice)
    given = tuple(role for role in finding.given if role not in conditioning.without)
    columns = {role: measure.column(role) for role in finding.roles}
    return OutsideChoices(
        finding, lags, terms, window, scale, procedure, given, columns, first, last
    )


def dates_there(prepared: Prepared, chosen: OutsideChoices) -> int:
    """Return how many dates of the window hold every series of the finding's baseline."""
    plan, finding = prepared.plan, chosen.finding
    measure = plan.axes["measures"][plan.finding_axes[finding.number]["measures"].baseline]
    assert isinstance(measure, MeasureChoice)
    raw = {role: prepared.dataset.column(measure.column(role)) for role in finding.roles}
    dates, left_out = _left_out(prepared, chosen)
    whole = pd.DataFrame(raw, index=dates).notna().all(axis=1) & ~left_out
    return int(whole[chosen.first : chosen.last].sum())


def _left_out(
    prepared: Prepared, chosen: OutsideChoices
) -> tuple[pd.DatetimeIndex, pd.Series[bool]]:
    """Return the dates of the data, and which of them lie in an episode left out."""
    calendar = prepared.dataset.calendar
    dates = pd.DatetimeIndex(pd.to_datetime(list(calendar.dates)))
    left_out = pd.Series(False, index=dates)
    for start, end in chosen.window.without:
        opens = parse_period(start, calendar.frequency)[0]
        closes = parse_period(end, calendar.frequency)[1]
        left_out |= (dates >= pd.Timestamp(opens)) & (dates <= pd.Timestamp(closes))
    return dates, left_out


def panel_of(prepared: Prepared, chosen: OutsideChoices) -> Panel:
    """Transform the series of a specification and cut its window."""
    frequency = prepared.dataset.calendar.frequency
    dates, left_out = _left_out(prepared, chosen)
    inside = slice(chosen.first, chosen.last)
    finding = chosen.finding
    roles = (*chosen.series, *(item.series for item in finding.exogenous))
    values, there, across = {}, {}, False
    for role in dict.fromkeys(roles):
        column = chosen.columns[role]
        name = scale_of(chosen.scale, role, column)
        raw = pd.Series(prepared.dataset.column(column), index=dates)
        if name in LOCAL:
            change = LOCAL[name](frequency)
            values[role] = change(raw.mask(left_out))[inside]
            there[role] = change(raw)[inside].notna()
        else:
            cut = raw.mask(left_out)[inside]
            meets = name == CYCLE and bool(left_out[inside].any())
            across |= meets
            # The filter uses every value of the window, so none is free of the episode.
            values[role] = WITHIN[name](cut.mask(cut.notna() & meets), frequency, chosen.scale)
            there[role] = values[role].notna()
    return Panel(pd.DataFrame(values), pd.DataFrame(there).all(axis=1), across)


def rows_of(
    prepared: Prepared,
    chosen: OutsideChoices,
    panel: Panel,
    orders: tuple[int, int, int],
    *,
    reverse: bool = False,
) -> Rows:
    """Build the rows of an equation with the given lags of effect, cause and given series."""
    effect, cause = chosen.finding.effect, chosen.finding.cause
    if reverse:
        effect, cause = cause, effect
    own, leading, others = orders
    depth = {effect: own, cause: leading} | dict.fromkeys(chosen.given, others)
    extra = chosen.procedure.extra_lags
    nuisance = _lags(panel, effect, 1, own + extra)
    for role in chosen.given:
        nuisance |= _lags(panel, role, 1, others + extra)
    nuisance |= _lags(panel, cause, leading + 1, leading + extra)
    nuisance |= _exogenous(panel, chosen.finding.exogenous)
    tested = _lags(panel, cause, 1, leading)
    # What must exist beside the regressors: current values, and a common sample's lags.
    also = {
        name: values
        for role in depth
        for name, values in _lags(panel, role, 0, chosen.lags.common).items()
    }
    complete = pd.DataFrame({**also, **nuisance, **tested}).notna().all(axis=1)
    unmodelled = [item.lags for item in chosen.finding.exogenous]
    longest = max(own, leading, others if chosen.given else 0) + extra
    complete &= panel.begun(max([longest, chosen.lags.common, *unmodelled]))
    index = panel.values.index[complete]
    terms = term_frame(prepared, chosen, panel.values.index)
    return Rows(
        panel.values.loc[index, effect],
        terms.loc[index],
        pd.DataFrame(nuisance, index=panel.values.index).loc[index],
        pd.DataFrame(tested).loc[index],
        panel.values.loc[index, [cause, effect]],
        np.flatnonzero(complete),
    )


def _lags(panel: Panel, role: str, low: int, high: int) -> dict[str, pd.Series[float]]:
    return {f"{role}, lag {lag}": panel.values[role].shift(lag) for lag in range(low, high + 1)}


def _exogenous(panel: Panel, items: tuple[Exogenous, ...]) -> dict[str, pd.Series[float]]:
    return {
        f"exogenous {name}": values
        for item in items
        for name, values in _lags(panel, item.series, 0, item.lags).items()
    }


def term_frame(
    prepared: Prepared, chosen: OutsideChoices, index: pd.Index[pd.Timestamp]
) -> pd.DataFrame:
    """Return the deterministic columns on the rows of a window."""
    terms, frequency = chosen.terms, prepared.dataset.calendar.frequency
    time = np.linspace(-1.0, 1.0, len(index)) if len(index) > 1 else np.zeros(len(index))
    found: dict[str, object] = {}
    for power in range(terms.trend + 1):
        found[f"time^{power}"] = time**power
    if terms.seasonal:
        season = _season(index, frequency)
        for number in sorted(range(frequency.seasons))[:-1]:
            centre = 0.0 if terms.trend >= 0 else 1.0 / frequency.seasons
            found[f"season {number}"] = (season == number) - centre
    for label in terms.steps:
        opens = pd.Timestamp(parse_period(label, frequency)[0])
        found[f"from {label}"] = (index >= _on_calendar(prepared, opens)).astype(float)
    for label in terms.pulses:
        opens = pd.Timestamp(parse_period(label, frequency)[0])
        found[f"at {label}"] = (index == _on_calendar(prepared, opens)).astype(float)
    for number in range(1, terms.fourier + 1):
        angle = 2 * np.pi * number * np.arange(len(index)) / len(index)
        found |= {f"sine {number}": np.sin(angle), f"cosine {number}": np.cos(angle)}
    return pd.DataFrame(found, index=index, dtype=float)


def _on_calendar(prepared: Prepared, day: pd.Timestamp) -> pd.Timestamp:
    """Return the first row's date at or after a day; holidays are no rows."""
    dates = pd.DatetimeIndex(pd.to_datetime(list(prepared.dataset.calendar.dates)))
    return dates[dates >= day][0]


def _season(index: pd.Index[pd.Timestamp], frequency: Frequency) -> pd.Series[int]:
    dates = pd.Series(pd.DatetimeIndex(index), index=index)
    if frequency.name == "monthly":
        return dates.dt.month - 1
    if frequency.name == "quarterly":
        return dates.dt.quarter - 1
    if frequency.name == "weekly":
        return dates.dt.isocalendar().week.astype(int).clip(upper=52) - 1
    return dates.dt.dayofweek


# -- the scales, written once more ---------------------------------------------------------

Local = Callable[["pd.Series[float]"], "pd.Series[float]"]


def _log(raw: pd.Series[float]) -> pd.Series[float]:
    return pd.Series(np.log(raw.where(raw > 0)), index=raw.index)


# Name → the change at a frequency; each value uses raw values at fixed distances only.
LOCAL: dict[str, Callable[[Frequency], Local]] = {
    "level": lambda _: lambda raw: raw,
    "log": lambda _: _log,
    "difference": lambda _: lambda raw: raw.diff(),
    "log difference": lambda _: lambda raw: _log(raw).diff(),
    "yearly growth": lambda f: lambda raw: _log(raw).diff(f.year or 0),
    "seasonal difference": lambda f: lambda raw: raw.diff(f.seasons),
    "inverse hyperbolic sine": lambda _: lambda raw: pd.Series(np.arcsinh(raw), index=raw.index),
}


def _detrended(
    cut: pd.Series[float], frequency: Frequency, choice: TransformationChoice
) -> pd.Series[float]:
    known = cut.dropna()
    place = pd.Series(range(len(cut)), index=cut.index, dtype=float)
    return _residual(known, place[known.index].to_frame("time")).reindex(cut.index)


def _cycle(
    cut: pd.Series[float], frequency: Frequency, choice: TransformationChoice
) -> pd.Series[float]:
    from statsmodels.tsa.filters.hp_filter import hpfilter

    known = cut.dropna()
    if len(known) < 3:
        return pd.Series(np.nan, index=cut.index)
    # A line has no cycle: taken out first, it costs the filter no digits.
    line = pd.DataFrame({"time": range(len(known))}, index=known.index, dtype=float)
    cycle, _ = hpfilter(_residual(known, line), choice.smoothing or frequency.smoothing)
    return pd.Series(cycle, index=known.index).reindex(cut.index)


def _hamilton(
    cut: pd.Series[float], frequency: Frequency, choice: TransformationChoice
) -> pd.Series[float]:
    horizon = choice.horizon or frequency.hamilton_horizon
    lagged = pd.DataFrame({lag: cut.shift(horizon + lag) for lag in range(frequency.seasons)})
    known = cut[cut.notna() & lagged.notna().all(axis=1)]
    if len(known) <= frequency.seasons + 1:
        return pd.Series(np.nan, index=cut.index)
    return _residual(known, lagged.loc[known.index]).reindex(cut.index)


def _residual(target: pd.Series[float], regressors: pd.DataFrame) -> pd.Series[float]:
    """Return least-squares residuals on a constant and some columns, by statsmodels."""
    import statsmodels.api as sm

    centred = regressors - regressors.mean()
    size = np.sqrt((centred**2).sum())
    design = sm.add_constant(centred / size.where(size > 0, 1.0), has_constant="add")
    fitted = sm.OLS(target - target.mean(), design).fit()
    return pd.Series(fitted.resid, index=target.index)


Within = Callable[["pd.Series[float]", Frequency, TransformationChoice], "pd.Series[float]"]
WITHIN: dict[str, Within] = {
    "linearly detrended": _detrended,
    CYCLE: _cycle,
    "Hamilton cycle": _hamilton,
}
