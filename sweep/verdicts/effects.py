"""Range of the effect's sign and size.

Coefficient sums are compared within one scale only (transformation × measures × form of
the test); across scales only the signed partial R² and the standardised sum are.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from .words import counted, number, percent

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["sentences"]


def sentences(effects_overall: pd.DataFrame, effects: pd.DataFrame) -> list[str]:
    """Put sign and size across scales, and agreement of signs within scales, into words.

    Parameters
    ----------
    effects_overall : DataFrame
        Columns quantity, rows, positive, minimum, lower_quartile, median, upper_quartile,
        maximum; quantities without a unit.
    effects : DataFrame
        Columns scale, rows, positive, negative, …; coefficient sums in the scale's own unit.
    """
    found = []
    for _, row in effects_overall.iterrows():
        rows, positive = int(row["rows"]), int(row["positive"])
        if not rows:
            continue
        found.append(
            f"The {row['quantity']} is positive in {positive:,} of {counted(rows, 'row')} "
            f"({percent(positive / rows)}); its median is {number(row['median'])}, its quartiles "
            f"{number(row['lower_quartile'])} and {number(row['upper_quartile'])}, and it runs "
            f"from {number(row['minimum'])} to {number(row['maximum'])}."
        )
    if not effects.empty:
        one_sign = int(((effects["positive"] == 0) | (effects["negative"] == 0)).sum())
        found.append(
            f"The sum of the lag coefficients keeps one sign throughout in {one_sign:,} of "
            f"{counted(len(effects), 'scale')} (a scale is one transformation, measure and form "
            "of the test)."
        )
    return found
