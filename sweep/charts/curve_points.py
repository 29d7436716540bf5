"""What a specification curve is drawn from: one scale, thinned evenly in rank, with intervals."""

from __future__ import annotations

from dataclasses import dataclass
from statistics import NormalDist
from typing import TYPE_CHECKING, Any

from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.verdicts.survival import OVERALL
from sweep.verdicts.words import missing

from .layout import spread_evenly

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Curve", "bounds_of", "curve_of", "scale_asked"]

Row = dict[str, Any]

# Share of the intervals on each side that may reach past the frame.
_CUT = 0.04


@dataclass(frozen=True, slots=True)
class Curve:
    """The specifications that are drawn, with what is known of all of them.

    Attributes
    ----------
    scale : str
        ``all``, or the name of one scale.
    drawn : tuple of mapping
        Rows of the store's frame, in order, each with ``low`` and ``high`` (interval; None where
        there is no standard error) and ``place`` (0 to 1 across).
    admissible, rows, survived, positive : int
        All admissible rows of the scale, those with an estimate, and of these the survivors and
        the positive ones.
    median : float
    scales : int
        Scales there are.
    level : float
        Level of the intervals, in (0, 1).
    """

    scale: str
    drawn: tuple[Row, ...]
    admissible: int
    rows: int
    survived: int
    positive: int
    median: float
    scales: int
    level: float

    @property
    def baseline(self) -> Row | None:
        """Return the baseline's row, if it is on the scale and admissible."""
        return next((row for row in self.drawn if row["is_baseline"]), None)

    @property
    def unit(self) -> str:
        """Return what the height is, in words."""
        if self.scale == OVERALL:
            return "standardised sum of the lag coefficients"
        return "sum of the lag coefficients"


def _names(frame: pd.DataFrame) -> list[str]:
    return [str(one) for one in frame["scale"].drop_duplicates() if one != OVERALL]


def scale_asked(frame: pd.DataFrame, scale: str | None) -> str:
    """Return the scale to draw: the one asked for, the only one, or all.

    Raises
    ------
    InputFault
        If the scale asked for is none of the finding's.
    """
    names = _names(frame)
    if scale is None:
        return names[0] if len(names) == 1 else OVERALL
    if scale == "baseline":
        held = frame[frame["baseline_scale"].fillna(False).astype(bool)]
        if not held.empty:
            return _names(held)[0]
    # The first words of a name will do where no other scale begins so.
    begun = [name for name in names if name.startswith(f"{scale} · ")]
    if len(begun) == 1:
        return begun[0]
    if scale not in (*names, OVERALL):
        known = ("baseline", OVERALL, *names)
        raise InputFault(Fault("scale", f'no scale "{scale}"' + suggestion(scale, known)))
    return scale


def curve_of(frame: pd.DataFrame, level: float, scale: str | None, most: int) -> Curve | None:
    """Return the curve thinned to what is drawn; None where nothing has an estimate."""
    if frame.empty:
        return None
    name = scale_asked(frame, scale)
    own = frame[frame["scale"] == name].to_dict("records")
    kept = [place for place, row in enumerate(own) if row["is_baseline"]]
    chosen = [own[place] for place in spread_evenly(len(own), most, kept)]
    reach = NormalDist().inv_cdf(1 - level / 2)
    drawn = []
    for place, row in enumerate(chosen):
        error = row["standard_error"]
        half = None if missing(error) else reach * float(error)
        estimate = float(row["estimate"])
        ends = (None, None) if half is None else (estimate - half, estimate + half)
        drawn.append(
            {str(key): value for key, value in row.items()}
            | {"low": ends[0], "high": ends[1], "place": round((place + 0.5) / len(chosen), 5)}
        )
    whole = own[0]
    return Curve(
        name,
        tuple(drawn),
        admissible=int(whole["admissible"]),
        rows=int(whole["rows"]),
        survived=int(whole["survived"]),
        positive=int(whole["positive"]),
        median=float(whole["median"]),
        scales=len(_names(frame)),
        level=level,
    )


def bounds_of(curve: Curve) -> tuple[float, float]:
    """Return the ends of the height: all estimates, zero, and all but the widest intervals."""
    values = [row["estimate"] for row in curve.drawn]
    low, high = min(*values, 0.0), max(*values, 0.0)
    lows = sorted(row["low"] for row in curve.drawn if row["low"] is not None)
    highs = sorted((row["high"] for row in curve.drawn if row["high"] is not None), reverse=True)
    own = curve.baseline
    if own is not None and own["low"] is not None:
        low, high = min(low, own["low"]), max(high, own["high"])
    cut = int(_CUT * len(lows))
    low, high = min([low, *lows[cut : cut + 1]]), max([high, *highs[cut : cut + 1]])
    return (low, high) if low < high else (low - 1, high + 1)
