"""What a procedure is given and what it gives back."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from sweep.kernels.longrun import LongRun
from sweep.plan.choices import ProcedureChoice

__all__ = ["Evidence", "Procedure", "Statistic"]

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Evidence:
    """Sums of squares of one regression in many windows.

    Attributes
    ----------
    explained : ndarray, shape (w,)
        s0 − s1: what the lags of the cause explain.
    residual : ndarray, shape (w,)
        s1: what is left with them.  Only ratios of the two matter.
    observations : ndarray of int, shape (w,)
        Regression rows T.
    regressors, restrictions : int
        k and q.
    robust_wald : mapping of covariance to ndarray, shape (w,)
        b′V⁻¹b for each sandwich covariance that was asked for.
    """

    explained: Floats
    residual: Floats
    observations: Ints
    regressors: int
    restrictions: int
    robust_wald: Mapping[str | LongRun, Floats]

    @property
    def freedom(self) -> Floats:
        """Residual degrees of freedom T − k, shape (w,)."""
        return (self.observations - self.regressors).astype(float)


@dataclass(frozen=True, slots=True)
class Statistic:
    """A statistic and its reference law, one a window.

    Attributes
    ----------
    value : ndarray, shape (w,)
    df_num : int
        Restrictions q.
    df_den : ndarray of int, shape (w,), or None
        Denominator degrees of freedom; None for a chi-square law.
    p_value : ndarray, shape (w,)
        Upper tail probability.
    """

    value: Floats
    df_num: int
    df_den: Ints | None
    p_value: Floats


class Procedure(Protocol):
    """One way of testing the finding; a module of this package."""

    NAME: str
    NUMERICS: int
    NEEDS: str
    NULL: str
    REFERENCE: str

    @staticmethod
    def applies(choice: ProcedureChoice) -> str | None:
        """Return why the choice cannot be run, or None."""
        ...

    @staticmethod
    def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
        """Return the statistic in every window."""
        ...
