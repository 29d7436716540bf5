"""The scales on which a series can enter: `TRANSFORMS`, one entry for each.

A *local* transformation at row t uses raw values at t and at fixed distances before it;
it is taken on the whole series before a window is cut.  A *window* transformation is
estimated from all values it is given, so it is taken inside the window.

All functions work along the last axis, take any number of leading axes, and put NaN where
the value is not defined.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sweep.panel.calendar import Frequency, as_frequency
from sweep.panel.filters import (
    hamilton,
    hamilton_reach,
    hodrick_prescott,
    linearly_detrended,
)

__all__ = ["TRANSFORMS", "Transform"]

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Transform:
    """One transformation and what has to be known before it is used.

    Attributes
    ----------
    name : str
        Trade word, as written in a plan.
    kind : {"local", "window"}
        Whether it may be taken before the window is cut.
    two_sided : bool
        True where a value depends on later values by construction, which blurs timing.
    needs_positive : bool
        True where a log is taken.
    unit_words : str
        Unit of the transformed series.
    reach : callable
        ``reach(frequency, horizon)``: distances of the raw values used, in periods.
    compute : callable
        ``compute(values, frequency, smoothing, horizon)``, all settings resolved.
    twins : callable
        ``twins(frequency)``: name of the transformation it coincides with, or None.
    needs_year, needs_smoothing : bool
        True where a fixed number of periods a year, or a smoothing parameter, is needed.
    """

    name: str
    kind: Literal["local", "window"]
    unit_words: str
    reach: Callable[[Frequency, int], tuple[int, ...]]
    compute: Callable[[Array, Frequency, float, int], Array]
    two_sided: bool = False
    needs_positive: bool = False
    twins: Callable[[Frequency], str | None] = lambda _: None
    needs_year: bool = False
    needs_smoothing: bool = False

    def unavailable(self, frequency: Frequency | str, smoothing: float = 0.0) -> str:
        """Return why the transformation makes no sense at a frequency, ``""`` if it does."""
        wanted = as_frequency(frequency)
        if self.needs_year and wanted.year is None:
            return f"{self.name} needs a fixed number of periods a year; {wanted.name} has none"
        if self.needs_smoothing and not smoothing and wanted.smoothing is None:
            return f"no smoothing parameter is usual for {wanted.name} data; give “smoothing”"
        return ""

    def offsets(self, frequency: Frequency | str, horizon: int = 0) -> tuple[int, ...]:
        """Return how far back the raw values lie that one transformed value uses.

        Parameters
        ----------
        frequency : Frequency or str
            Frequency of the series.
        horizon : int
            Hamilton horizon in periods, 0 for two years.

        Returns
        -------
        tuple of int
            Distances in periods, ascending, 0 first.  For a window transformation these
            are the values beside the estimated coefficients or trend.

        Raises
        ------
        ValueError
            If the transformation is unavailable at the frequency.
        """
        wanted = as_frequency(frequency)
        if self.needs_year and wanted.year is None:
            raise ValueError(self.unavailable(wanted))
        return self.reach(wanted, horizon or wanted.hamilton_horizon)

    def apply(
        self,
        values: Array,
        frequency: Frequency | str,
        smoothing: float = 0.0,
        horizon: int = 0,
    ) -> Array:
        """Transform series along the last axis.

        Parameters
        ----------
        values : float64 (..., n)
            Raw values, NaN where missing.
        frequency : Frequency or str
            Frequency of the series.
        smoothing : float
            Hodrick-Prescott parameter, 0.0 for the frequency's usual one.
        horizon : int
            Hamilton horizon in periods, 0 for two years.

        Returns
        -------
        float64 (..., n)
            In ``unit_words``; NaN where undefined (a missing value, a log of a value that
            is not positive, too few rows before it, too few rows to estimate).

        Raises
        ------
        ValueError
            If the transformation is unavailable at the frequency.
        """
        wanted = as_frequency(frequency)
        reason = self.unavailable(wanted, smoothing)
        if reason:
            raise ValueError(reason)
        data = np.asarray(values, dtype=np.float64)
        return self.compute(
            data, wanted, smoothing or wanted.smoothing or 0.0, horizon or wanted.hamilton_horizon
        )

    def equals(self, frequency: Frequency | str) -> str | None:
        """Return the transformation that gives the same numbers at a frequency, or None."""
        return self.twins(as_frequency(frequency))


# -- local --------------------------------------------------------------------------------


def _log(values: Array) -> Array:
    out = np.full(values.shape, np.nan)
    np.log(values, out=out, where=values > 0.0)
    return out


def _back(values: Array, distance: int) -> Array:
    """Return the values some periods earlier, NaN where there are none."""
    out = np.full(values.shape, np.nan)
    if distance < values.shape[-1]:
        out[..., distance:] = values[..., : values.shape[-1] - distance]
    return out


def _change(values: Array, distance: int) -> Array:
    return values - _back(values, distance)


def _periods_a_year(frequency: Frequency) -> int:
    if frequency.year is None:  # `unavailable` has been asked before
        raise ValueError(f"{frequency.name} data have no fixed number of periods a year")
    return frequency.year


# -- the family ---------------------------------------------------------------------------

TRANSFORMS: dict[str, Transform] = {
    transform.name: transform
    for transform in (
        Transform(
            "level",
            "local",
            "units of the series",
            reach=lambda f, h: (0,),
            compute=lambda y, f, s, h: y.copy(),
        ),
        Transform(
            "log",
            "local",
            "log points",
            reach=lambda f, h: (0,),
            compute=lambda y, f, s, h: _log(y),
            needs_positive=True,
        ),
        Transform(
            "difference",
            "local",
            "units of the series, change on the period",
            reach=lambda f, h: (0, 1),
            compute=lambda y, f, s, h: _change(y, 1),
        ),
        Transform(
            "log difference",
            "local",
            "log points, change on the period",
            reach=lambda f, h: (0, 1),
            compute=lambda y, f, s, h: _change(_log(y), 1),
            needs_positive=True,
        ),
        Transform(
            "yearly growth",
            "local",
            "log points, change on the year",
            reach=lambda f, h: (0, _periods_a_year(f)),
            compute=lambda y, f, s, h: _change(_log(y), _periods_a_year(f)),
            needs_positive=True,
            needs_year=True,
            twins=lambda f: "log difference" if f.year == 1 else None,
        ),
        Transform(
            "seasonal difference",
            "local",
            "units of the series, change on the season",
            reach=lambda f, h: (0, f.seasons),
            compute=lambda y, f, s, h: _change(y, f.seasons),
            twins=lambda f: "difference" if f.seasons == 1 else None,
        ),
        Transform(
            "inverse hyperbolic sine",
            "local",
            "inverse hyperbolic sine of the series",
            reach=lambda f, h: (0,),
            compute=lambda y, f, s, h: np.arcsinh(y),
        ),
        Transform(
            "linearly detrended",
            "window",
            "units of the series, distance from a line",
            reach=lambda f, h: (0,),
            compute=lambda y, f, s, h: linearly_detrended(y),
        ),
        Transform(
            "Hodrick-Prescott cycle",
            "window",
            "units of the series, distance from the trend",
            reach=lambda f, h: (0,),
            compute=lambda y, f, s, h: hodrick_prescott(y, s),
            two_sided=True,
            needs_smoothing=True,
        ),
        Transform(
            "Hamilton cycle",
            "window",
            "units of the series, surprise over the horizon",
            reach=lambda f, h: hamilton_reach(h, f.hamilton_lags),
            compute=lambda y, f, s, h: hamilton(y, h, f.hamilton_lags),
        ),
    )
}
