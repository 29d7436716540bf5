"""Enough observations: T ≥ 3k and T − k ≥ 20 in the effect's equation.

Common practice, no source: three observations a regressor is the usual floor, and with
fewer than twenty degrees of freedom F and chi-square laws part.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

NAME = "enough observations"
BIT = 0
NUMERICS = 1
GRAIN = "regression"
COST = "moments"
PER_REGRESSOR = 3
FREEDOM = 20
WORDS = f"at least {PER_REGRESSOR} observations a regressor and {FREEDOM} degrees of freedom"


def passes(observations: NDArray[np.int64], regressors: int) -> NDArray[np.bool_]:
    """Say where a regression has enough observations.

    Parameters
    ----------
    observations : ndarray of int, shape (w,)
        Regression rows T.
    regressors : int
        Regressors k.

    Returns
    -------
    ndarray of bool, shape (w,)
    """
    enough = (observations >= PER_REGRESSOR * regressors) & (observations - regressors >= FREEDOM)
    return np.asarray(enough)
