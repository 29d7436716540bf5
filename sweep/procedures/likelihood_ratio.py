"""LR: T ln(s0/s1) on χ²(q), no small-sample factor."""

from __future__ import annotations

import numpy as np

from sweep.kernels.tails import chi_square_tail
from sweep.plan.choices import ProcedureChoice
from sweep.procedures.record import Evidence, Statistic

NAME = "LR"
NUMERICS = 1
NEEDS = "moments"
NULL = "every lag coefficient of the cause in the effect's equation is zero"
REFERENCE = "Geweke, Meese & Dent (1983, Journal of Econometrics 21:161-194)"


def applies(choice: ProcedureChoice) -> str | None:
    """Return why the choice cannot be run, or None."""
    return None if choice.covariance == "classical" else "LR has no form with a sandwich covariance"


def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
    """Return T ln(s0/s1), from ln(1 + (s0 − s1)/s1), and its tail on χ²(q)."""
    value = evidence.observations.astype(float) * np.log1p(evidence.explained / evidence.residual)
    q = evidence.restrictions
    return Statistic(value, q, None, chi_square_tail(value, float(q)))
