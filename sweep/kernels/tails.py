"""Upper tail probabilities, from survival functions and never from one minus a cdf."""

from __future__ import annotations

import numpy as np
from scipy import special

from sweep.kernels.layout import Floats

__all__ = ["chi_square_tail", "f_tail", "normal_tail_inverse", "student_tail"]


def f_tail(statistic: Floats, df_num: float | Floats, df_den: float | Floats) -> Floats:
    """Return P(F ≥ statistic) of the F law, NaN where the statistic is NaN."""
    return np.asarray(special.fdtrc(df_num, df_den, statistic))


def chi_square_tail(statistic: Floats, df: float | Floats) -> Floats:
    """Return P(χ² ≥ statistic), NaN where the statistic is NaN."""
    return np.asarray(special.chdtrc(df, statistic))


def student_tail(statistic: Floats, df: float | Floats) -> Floats:
    """Return the two-sided tail probability of Student's t."""
    return np.asarray(special.fdtrc(1.0, df, np.square(statistic)))


def normal_tail_inverse(probability: Floats, cap: float = 37.0) -> Floats:
    """Return z with P(Z ≥ z) = probability, within ±cap (double precision ends near 38)."""
    return np.clip(-special.ndtri(np.asarray(probability)), -cap, cap)
