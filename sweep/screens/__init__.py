"""Preconditions of a specification, one file each; bits are fixed for ever."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Protocol, cast

import numpy as np
from numpy.typing import NDArray

from sweep.screens import enough_observations

__all__ = ["SCREENS", "Screen", "mask_of"]


class Screen(Protocol):
    """What a screen's module says of itself."""

    NAME: str
    BIT: int
    NUMERICS: int
    GRAIN: str
    COST: str
    WORDS: str

    @staticmethod
    def passes(observations: NDArray[np.int64], regressors: int) -> NDArray[np.bool_]:
        """Say where the precondition holds."""
        ...


SCREENS: dict[str, Screen] = {
    module.NAME: cast(Screen, module) for module in (enough_observations,)
}


def mask_of(names: Iterable[str]) -> int:
    """Return the bit mask of some screens.

    Examples
    --------
    >>> mask_of(["enough observations"])
    1
    """
    return sum({1 << SCREENS[name].BIT for name in names})
