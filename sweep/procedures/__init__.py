"""The ways of testing a finding, one file each.

To add one: write the file, add a line here, add a row to its validation table.
"""

from __future__ import annotations

from typing import cast

from sweep.procedures import f_form, lag_augmented, likelihood_ratio, score, wald
from sweep.procedures.record import Evidence, Procedure, Statistic

__all__ = ["PROCEDURES", "Evidence", "Procedure", "Statistic", "numerics"]

PROCEDURES: dict[str, Procedure] = {
    module.NAME: cast(Procedure, module)
    for module in (f_form, wald, likelihood_ratio, score, lag_augmented)
}

ENGINE_NUMERICS = 3
"""Raised when the moments, lag choices or samples change a number of every procedure."""


def numerics() -> str:
    """Return the numerics versions that stored rows are matched on, as one text."""
    parts = [f"engine {ENGINE_NUMERICS}"]
    parts += [f"{name} {procedure.NUMERICS}" for name, procedure in sorted(PROCEDURES.items())]
    return ", ".join(parts)
