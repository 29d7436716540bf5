"""F: ((s0 − s1)/q) / (s1/(T − k)) on F(q, T − k); with a sandwich covariance b′V⁻¹b/q.

Granger (1969, Econometrica 37:424-438); the sandwich form is the default of a robust test
because the chi-square form rejects far too often in small samples.
"""

from __future__ import annotations

from sweep.kernels.tails import f_tail
from sweep.plan.choices import ProcedureChoice
from sweep.procedures.record import Evidence, Statistic

NAME = "F"
NUMERICS = 1
NEEDS = "moments"
NULL = "every lag coefficient of the cause in the effect's equation is zero"
REFERENCE = "Granger (1969); White (1980) and MacKinnon & White (1985) for HC0 to HC3"


def applies(choice: ProcedureChoice) -> str | None:
    """Return None: F has a form with every covariance."""
    return None


def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
    """Return F and its tail probability on F(q, T − k).

    Parameters
    ----------
    evidence : Evidence
    choice : ProcedureChoice
        Its covariance says which form.

    Returns
    -------
    Statistic
        NaN where the sandwich does not exist.
    """
    q, freedom = evidence.restrictions, evidence.freedom
    if choice.covariance == "classical":
        value = evidence.explained / evidence.residual * freedom / q
    else:
        value = evidence.robust_wald[choice.sandwich] / q
    return Statistic(value, q, freedom.astype(int), f_tail(value, float(q), freedom))
