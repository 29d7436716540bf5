"""Lag augmented: the first p lags of the cause in a regression in levels with p + d lags.

With d at least the largest order of integration, the d extra lags take up what is not
stationary, and the statistic on the first p lags keeps its usual law whether or not the series
are integrated or cointegrated (Toda & Yamamoto 1995, Journal of Econometrics 66:225-250;
Dolado & Lütkepohl 1996, Econometric Reviews 15:369-386).  The extra lags are never tested.
F on F(q, T − k) is the default form, since χ² rejects too often in small samples.
"""

from __future__ import annotations

from dataclasses import replace
from typing import cast

from sweep.plan.choices import ProcedureChoice
from sweep.procedures import f_form, wald
from sweep.procedures.record import Evidence, Procedure, Statistic

NAME = "lag augmented"
NUMERICS = 1
NEEDS = "moments"
NULL = "the first p lag coefficients of the cause in the effect's equation are zero"
REFERENCE = "Toda & Yamamoto (1995); Dolado & Lütkepohl (1996)"
SCALES = ("level", "log")

FORMS: dict[str, Procedure] = {
    f_form.NAME: cast(Procedure, f_form), wald.NAME: cast(Procedure, wald)
}  # fmt: skip


def applies(choice: ProcedureChoice) -> str | None:
    """Return why the choice cannot be run, or None: its form says which covariances it has."""
    return FORMS[choice.form].applies(replace(choice, statistic=choice.form))


def compute(evidence: Evidence, choice: ProcedureChoice) -> Statistic:
    """Return the statistic of the chosen form on the first p lags.

    Parameters
    ----------
    evidence : Evidence
        Of the regression with p + d lags; its restrictions are the first p.
    choice : ProcedureChoice
        Its form is ``F`` or ``Wald``.

    Returns
    -------
    Statistic
    """
    return FORMS[choice.form].compute(evidence, replace(choice, statistic=choice.form))
