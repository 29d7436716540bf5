"""Filters that are estimated from all values they are given, batched over series."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

__all__ = ["hamilton", "hamilton_reach", "hodrick_prescott", "linearly_detrended"]

Array = NDArray[np.float64]


def hamilton_reach(horizon: int, lags: int) -> tuple[int, ...]:
    """Return the distances of the raw values in one Hamilton residual, in periods."""
    return (0, *range(horizon, horizon + lags))


def linearly_detrended(values: Array) -> Array:
    """Return the residual of each series on a constant and time.

    Parameters
    ----------
    values : float64 (..., n)
        Series along the last axis; the line is estimated on the finite rows of each.

    Returns
    -------
    float64 (..., n)
        In units of the series; NaN where the series is, and throughout with fewer than
        three finite rows.
    """
    here = np.isfinite(values)
    count = here.sum(axis=-1, keepdims=True)
    safe = np.maximum(count, 1)
    y = np.where(here, values, 0.0)
    y = np.where(here, y - y.sum(axis=-1, keepdims=True) / safe, 0.0)
    time = np.arange(values.shape[-1], dtype=np.float64)
    t = np.where(here, time - (here * time).sum(axis=-1, keepdims=True) / safe, 0.0)
    spread = (t * t).sum(axis=-1, keepdims=True)
    slope = (t * y).sum(axis=-1, keepdims=True) / np.where(spread > 0.0, spread, 1.0)
    # Two points fit a line exactly: no residual is left to speak of.
    return np.where(here & (count > 2), y - slope * t, np.nan)


def hodrick_prescott(values: Array, smoothing: float) -> Array:
    """Return the cycle of the Hodrick-Prescott filter (Hodrick & Prescott 1997).

    The trend minimises Σ(y-τ)² + λ Σ(Δ²τ)².  With D the second-difference matrix the cycle
    is D'(DD' + I/λ)⁻¹ D y, which unlike y - τ loses no digits to the level of the series.

    Parameters
    ----------
    values : float64 (..., n)
        Series along the last axis.
    smoothing : float
        λ > 0.

    Returns
    -------
    float64 (..., n)
        In units of the series.  Leading and trailing NaN stay; a series with a hole
        between its first and last value, or with fewer than three values, is NaN
        throughout, since the filter has no meaning across a hole.
    """
    flat = values.reshape(-1, values.shape[-1])
    out = np.full(flat.shape, np.nan)
    stretches: dict[tuple[int, int], list[int]] = {}
    for row, here in enumerate(np.isfinite(flat)):
        found = np.flatnonzero(here)
        if found.size >= 3 and found[-1] - found[0] + 1 == found.size:
            stretches.setdefault((int(found[0]), int(found[-1]) + 1), []).append(row)
    for (start, stop), rows in stretches.items():
        out[np.array(rows), start:stop] = _cycle(flat[rows, start:stop], smoothing)
    return out.reshape(values.shape)


def _cycle(values: Array, smoothing: float) -> Array:
    from scipy.linalg import solveh_banded

    size = values.shape[-1] - 2
    bands = np.zeros((min(3, size), size))
    for row, weight in enumerate((6.0 + 1.0 / smoothing, -4.0, 1.0)[: len(bands)]):
        bands[row, : size - row] = weight
    bent = solveh_banded(bands, np.diff(values, n=2, axis=-1).T, lower=True).T
    out = np.zeros(values.shape)
    out[..., :-2] += bent
    out[..., 1:-1] -= 2.0 * bent
    out[..., 2:] += bent
    return out


def hamilton(values: Array, horizon: int, lags: int) -> Array:
    """Return the residual of y[t+h] on 1, y[t], …, y[t-p+1], dated t+h (Hamilton 2018).

    Estimated by projection on an orthonormal basis of the regressors, so that a series
    that the regressors fit exactly (a line, a constant) leaves zeros and no failure.

    Parameters
    ----------
    values : float64 (..., n)
        Series along the last axis; the regression uses the complete rows of each.
    horizon : int
        h, in periods.
    lags : int
        p, the values on the right-hand side.

    Returns
    -------
    float64 (..., n)
        In units of the series; NaN in the first h + p - 1 rows, where a value is missing, and
        throughout with no more complete rows than coefficients.
    """
    out = np.full(values.shape, np.nan)
    rows = values.shape[-1] - horizon - lags + 1
    if rows <= lags + 1:
        return out
    start = horizon + lags - 1
    target = values[..., start:]
    earlier = np.stack(
        [values[..., start - d : start - d + rows] for d in hamilton_reach(horizon, lags)[1:]],
        axis=-1,
    )
    here = np.isfinite(target) & np.isfinite(earlier).all(axis=-1)
    count = here.sum(axis=-1)
    safe = np.maximum(count, 1)[..., None]
    y = np.where(here, target, 0.0)
    y = np.where(here, y - y.sum(axis=-1, keepdims=True) / safe, 0.0)
    x = np.where(here[..., None], earlier, 0.0)
    x = np.where(here[..., None], x - x.sum(axis=-2, keepdims=True) / safe[..., None], 0.0)
    level = np.abs(np.where(np.isfinite(values), values, 0.0)).max(axis=-1)[..., None]
    # What is left of a constant after centring is rounding of its level, not variation.
    length = np.sqrt((x * x).sum(axis=-2))
    noise = 8.0 * np.finfo(float).eps * level * np.sqrt(rows)
    x = x / np.where(length > noise, length, np.inf)[..., None, :]
    basis, strength, _ = np.linalg.svd(x, full_matrices=False)
    basis = np.where((strength > 1e-12)[..., None, :], basis, 0.0)
    weights = np.einsum("...rk,...r->...k", basis, y)
    residual = y - np.einsum("...rk,...k->...r", basis, weights)
    enough = (count > lags + 1)[..., None]
    out[..., start:] = np.where(here & enough, residual, np.nan)
    return out
