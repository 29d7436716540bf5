"""Long-run covariances of scores: kernels, bandwidths and weighted sums over lags in time.

The estimate is S = Γ₀ + Σ_j w_j (Γ_j + Γ_j′) with Γ_j = Σ_t s_t s_{t−j}′ (sums, not means) and the
weights w of a kernel: Bartlett (Newey & West 1987, Econometrica 55:703-708) or quadratic
spectral (Andrews 1991, Econometrica 59:817-858).  Scores stand on a grid of time: a row that
is missing has score zero, so that rows on both sides of a gap are never taken for neighbours.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sweep.kernels.layout import Floats, Ints

__all__ = [
    "LongRun", "andrews_bandwidth", "chosen_bandwidth", "kernel_weights", "long_run",
    "newey_west_bandwidth", "on_time_grid",
]  # fmt: skip


@dataclass(frozen=True, slots=True)
class LongRun:
    """An autocorrelation-robust covariance as an entry of a plan means it.

    Attributes
    ----------
    kernel : str
        ``Bartlett`` or ``quadratic spectral``.
    bandwidth : float or str
        Periods, or the rule ``Newey-West`` or ``Andrews``.
    small_sample : bool
        Whether the covariance is scaled by T/(T − k).
    """

    kernel: str
    bandwidth: float | str
    small_sample: bool = False

    def __str__(self) -> str:
        scaled = ", T/(T-k)" if self.small_sample else ""
        return f"HAC, {self.kernel}, {self.bandwidth}{scaled}"


# A quadratic spectral weight never reaches zero; below this it adds nothing that counts.
SMALLEST_WEIGHT = 1e-7
# Rates of the automatic bandwidths: constant, power of the sample size.
_NEWEY_WEST = {"Bartlett": (1.1447, 1 / 3), "quadratic spectral": (1.3221, 1 / 5)}
_TRUNCATION = {"Bartlett": 2 / 9, "quadratic spectral": 2 / 25}
# An autoregressive coefficient at one has no plug-in bandwidth; Andrews (1991) holds it inside.
_LARGEST_ROOT = 0.97


def on_time_grid(scores: Floats, times: Ints) -> Floats:
    """Put scores on the grid from their first to their last date, zero where a row is missing.

    Parameters
    ----------
    scores : ndarray, shape (t, s)
        One row a regression row, in order of time.
    times : ndarray of int, shape (t,)
        Period of each row.

    Returns
    -------
    ndarray, shape (times[-1] − times[0] + 1, s)
    """
    grid = np.zeros((int(times[-1] - times[0]) + 1, scores.shape[1]))
    grid[times - times[0]] = scores
    return grid


def kernel_weights(kernel: str, bandwidth: float, periods: int) -> Floats:
    """Return the weights of lags 1, 2, … as far as they count.

    Parameters
    ----------
    kernel : str
        ``Bartlett``: w_j = 1 − j/(bandwidth + 1), so that bandwidth 4 means four lags; or
        ``quadratic spectral`` with x = j/bandwidth,
        w = 25/(12π²x²) (sin(6πx/5)/(6πx/5) − cos(6πx/5)).
    bandwidth : float
        Periods, zero or more.
    periods : int
        Length of the grid; no lag can be longer.

    Returns
    -------
    ndarray, shape (j,)

    Examples
    --------
    >>> kernel_weights("Bartlett", 3, 100).tolist()
    [0.75, 0.5, 0.25]
    """
    lags = np.arange(1, max(periods, 1))
    if kernel == "Bartlett":
        weights = 1.0 - lags / (bandwidth + 1.0)
        return np.asarray(weights[weights > 0])
    if bandwidth <= 0:
        return np.empty(0)
    angle = 6 * np.pi / 5 * lags / bandwidth
    weights = 3.0 / angle**2 * (np.sin(angle) / angle - np.cos(angle))
    counting = np.flatnonzero(np.abs(weights) > SMALLEST_WEIGHT)
    return np.asarray(weights[: counting[-1] + 1] if counting.size else weights[:0])


def long_run(scores: Floats, weights: Floats) -> Floats:
    """Return S of each window.

    Parameters
    ----------
    scores : ndarray, shape (w, t, s)
        On grids of time of equal length.
    weights : ndarray, shape (j,)

    Returns
    -------
    ndarray, shape (w, s, s)
        Sums over time, symmetric.
    """
    # One product with the weighted sum of the shifted scores, not one for each lag.
    ahead = np.zeros_like(scores)
    periods = scores.shape[1]
    for lag, weight in enumerate(weights[: periods - 1], start=1):
        ahead[:, lag:] += weight * scores[:, : periods - lag]
    crossed = scores.transpose(0, 2, 1) @ ahead
    own = scores.transpose(0, 2, 1) @ scores
    return np.asarray(own + crossed + crossed.transpose(0, 2, 1))


def newey_west_bandwidth(scores: Floats, counted: Floats, rows: int, kernel: str) -> float:
    """Return the automatic bandwidth of Newey & West (1994, REStud 61:631-653), no prewhitening.

    With h_t the sum of the counted scores, σ_j their autocovariances and
    n = ⌊4(T/100)^(2/9)⌋ (Bartlett) or ⌊4(T/100)^(2/25)⌋ (quadratic spectral), it is
    1.1447 ((s₁/s₀)²)^(1/3) T^(1/3) or 1.3221 ((s₂/s₀)²)^(1/5) T^(1/5), with
    s₀ = σ₀ + 2Σσ_j and s_i = 2Σ jⁱσ_j.

    Parameters
    ----------
    scores : ndarray, shape (t, s)
        On the grid of time.
    counted : ndarray, shape (s,)
        Weight of each score in h; by convention zero for the constant.
    rows : int
        Regression rows T.
    kernel : str
        ``Bartlett`` or ``quadratic spectral``.

    Returns
    -------
    float
        Periods; NaN where the scores do not move.
    """
    power = 1 if kernel == "Bartlett" else 2
    longest = int(4 * (rows / 100) ** _TRUNCATION[kernel])
    path = scores @ counted
    covariances = np.array(
        [path[lag:] @ path[: path.size - lag] for lag in range(min(longest, path.size - 1) + 1)]
    )
    lags = np.arange(covariances.size)
    level = covariances[0] + 2 * covariances[1:].sum()
    slope = 2 * (lags**power * covariances).sum()
    if level == 0:
        return float("nan")
    constant, rate = _NEWEY_WEST[kernel]
    root = 1 / (2 * power + 1)
    return float(constant * ((slope / level) ** 2) ** root * rows**rate)


def andrews_bandwidth(scores: Floats, counted: Floats, rows: int, kernel: str) -> float:
    """Return the plug-in bandwidth of Andrews (1991), from first-order autoregressions.

    1.1447 (α₁T)^(1/3) for Bartlett and 1.3221 (α₂T)^(1/5) for the quadratic spectral kernel,
    with ρ and σ² of the autoregression (with intercept) of each counted score and

        α₁ = Σ 4ρ²σ⁴/((1−ρ)⁶(1+ρ)²) / Σ σ⁴/(1−ρ)⁴,   α₂ = Σ 4ρ²σ⁴/(1−ρ)⁸ / Σ σ⁴/(1−ρ)⁴.

    Parameters
    ----------
    scores, counted, rows, kernel
        As for :func:`newey_west_bandwidth`.

    Returns
    -------
    float
        Periods; NaN where the scores do not move.
    """
    # With an intercept: inside a window the scores of a regressor need not have mean zero.
    now, before = (part - part.mean(axis=0) for part in (scores[1:], scores[:-1]))
    squares = (before**2).sum(axis=0)
    if not (squares[counted != 0] > 0).all():
        return float("nan")
    squares = np.where(squares > 0, squares, 1.0)
    root = np.clip((now * before).sum(axis=0) / squares, -_LARGEST_ROOT, _LARGEST_ROOT)
    variance = ((now - root * before) ** 2).mean(axis=0)
    weight = counted * variance**2
    below = (weight / (1 - root) ** 4).sum()
    if kernel == "Bartlett":
        above = (weight * 4 * root**2 / ((1 - root) ** 6 * (1 + root) ** 2)).sum()
    else:
        above = (weight * 4 * root**2 / (1 - root) ** 8).sum()
    constant, rate = _NEWEY_WEST[kernel]
    return float(constant * (above / below * rows) ** rate)


def chosen_bandwidth(how: LongRun, regressors: Floats, residuals: Floats, times: Ints) -> float:
    """Return the bandwidth of one regression, by the fixed number or the rule.

    The rules sum over the scores of all regressors that are not deterministic.  Regressors are
    standardised first, so that the bandwidth depends neither on units of measurement nor on how
    a trend is written (rules as they are usually programmed do).  Newey & West's is cut to
    whole lags; Andrews's Bartlett bandwidth counts the lag at which the weight reaches zero,
    one more than ours.

    Parameters
    ----------
    how : LongRun
    regressors : ndarray, shape (t, s)
        Without the deterministic terms.
    residuals : ndarray, shape (t,)
    times : ndarray of int, shape (t,)
        Period of each row.

    Returns
    -------
    float
        For :func:`kernel_weights`; NaN where the scores do not move.
    """
    if not isinstance(how.bandwidth, str):
        return float(how.bandwidth)
    centred = regressors - regressors.mean(axis=0)
    spread = np.sqrt((centred**2).mean(axis=0))
    if not (spread > 0).all():
        return float("nan")
    grid = on_time_grid(centred / spread * residuals[:, None], times)
    counted = np.ones(grid.shape[1])
    rows = residuals.size
    if how.bandwidth == "Newey-West":
        found = newey_west_bandwidth(grid, counted, rows, how.kernel)
        return float(np.floor(found)) if how.kernel == "Bartlett" else found
    found = andrews_bandwidth(grid, counted, rows, how.kernel)
    return max(found - 1.0, 0.0) if how.kernel == "Bartlett" else found
