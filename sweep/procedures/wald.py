"""Wald: q·F on χ²(q), or with divisor T: T(s0 − s1)/s1; with a sandwich b′V⁻¹b on χ²(q).

Sources differ in the divisor of the residual variance by up to a factor T/(T − k); both are
here under their names.
"""

from __future__ import annotations

from sweep.kernels.tails import chi_square_tail
from sweep.plan.choices import ProcedureChoice
from sweep.procedures.record import Evidence, Statistic

NAME = "Wald"
NUMERICS = 1
NEEDS = "moments"
NULL = "every lag coefficient of the cause in the effect's equation is zero"
REFERENCE = "Lütkepohl (2005, section 3.6)"


def applies(choice: ProcedureChoice) -> str | None:
    """Return None: Wald has a form with every covariance."""
    return None


def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
    """Return the Wald statistic and its tail probability on χ²(q)."""
    if choice.covariance != "classical":
        value = evidence.robust_wald[choice.sandwich]
    else:
        rows = evidence.observations if choice.divisor == "T" else evidence.freedom
        value = evidence.explained / evidence.residual * rows
    q = evidence.restrictions
    return Statistic(value, q, None, chi_square_tail(value, float(q)))
