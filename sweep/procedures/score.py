"""LM (score): T(s0 − s1)/s0 on χ²(q), T·R² of the restricted residuals on all regressors."""

from __future__ import annotations

from sweep.kernels.tails import chi_square_tail
from sweep.plan.choices import ProcedureChoice
from sweep.procedures.record import Evidence, Statistic

NAME = "LM"
NUMERICS = 1
NEEDS = "moments"
NULL = "every lag coefficient of the cause in the effect's equation is zero"
REFERENCE = "Geweke, Meese & Dent (1983, Journal of Econometrics 21:161-194)"


def applies(choice: ProcedureChoice) -> str | None:
    """Return why the choice cannot be run, or None."""
    return None if choice.covariance == "classical" else "LM has no form with a sandwich covariance"


def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
    """Return T(s0 − s1)/s0 and its tail on χ²(q)."""
    restricted = evidence.explained + evidence.residual
    value = evidence.observations * (evidence.explained / restricted)
    q = evidence.restrictions
    return Statistic(value, q, None, chi_square_tail(value, float(q)))
