"""Round numbers for a scale."""

from __future__ import annotations

import math

__all__ = ["round_ticks", "tick_texts"]


def round_ticks(low: float, high: float, most: int) -> list[float]:
    """Return at most so many round numbers from low to high, ends included where they are round.

    Parameters
    ----------
    low, high : float
        Ends of the scale, low < high.
    most : int
        Most numbers to return, at least 2.

    Examples
    --------
    >>> round_ticks(-0.13, 0.42, 5)
    [0.0, 0.2, 0.4]
    >>> round_ticks(-3, 12, 4)
    [0.0, 5.0, 10.0]
    """
    power = 10.0 ** math.floor(math.log10((high - low) / most))
    for factor in (1, 2, 5, 10, 20):
        step = factor * power
        first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
        if last - first < most:
            return [round(number * step, 12) for number in range(first, last + 1)]
    raise AssertionError("a step of twenty parts of the range leaves few enough numbers")


def tick_texts(ticks: list[float]) -> list[str]:
    """Write ticks with as many decimals as the finest of them needs.

    Examples
    --------
    >>> tick_texts([-0.5, 0.0, 0.25]), tick_texts([0.0, 5000.0])
    (['−0.50', '0.00', '0.25'], ['0', '5,000'])
    """
    decimals = max((_decimals(tick) for tick in ticks), default=0)
    return [f"{tick:,.{decimals}f}".replace("-", "−") for tick in ticks]


def _decimals(tick: float) -> int:
    text = f"{tick:.12f}".rstrip("0")
    return len(text.partition(".")[2])
