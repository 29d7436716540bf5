"""One stored row held against the slow path, statsmodels and the plan."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
import pandas as pd

from sweep.engine.outside import OutsideDirection, obstacles, outside
from sweep.engine.outside_rows import OutsideChoices, choices_of
from sweep.engine.prepare import Prepared
from sweep.engine.reasons import REASONS, Status
from sweep.engine.recheck import SlowDirection, recheck

if TYPE_CHECKING:
    from sweep.plan.choices import ProcedureChoice

__all__ = ["EXACT", "NUMBERS", "Found", "verify_row"]

NUMBERS = (
    "statistic", "p_value", "coefficient_sum", "coefficient_sum_se", "signed_partial_r2",
    "standardised_sum", "reverse_statistic", "reverse_p_value", "reverse_coefficient_sum",
    "lag_coefficient", "lag_standard_error",
)  # fmt: skip
EXACT = ("order_used", "observations", "df_num", "df_den", "window", "status")
FLOOR = 1e-3
"""A statistic below this part of what chance gives has lost digits to s0 − s1, and p is near 1."""
NOTHING = 1e-290
"""Below it two tail probabilities count as equal: neither is a normal number any more."""


@dataclass(frozen=True, slots=True)
class Found:
    """One value compared once.

    Attributes
    ----------
    finding, specification, quantity, by : str
    lag : int
        Of a lag coefficient (negative in the reverse direction); 0 otherwise.
    stored, recomputed : str
    difference : float or None
        Relative; None for what can only be equal or not.
    differs : bool
    """

    finding: str
    specification: str
    quantity: str
    by: str
    lag: int
    stored: str
    recomputed: str
    difference: float | None
    differs: bool


@dataclass(frozen=True, slots=True)
class _Direction:
    """The numbers that both ways of recomputing have, under the store's names.

    Attributes
    ----------
    values, scales : mapping of name to float
        Each number, and what its difference is relative to.
    exact : mapping of name to int or None
    lags : list of (coefficient, standard error)
    magnified : float
        How much the tail magnifies a relative difference of the statistic.
    """

    values: dict[str, float]
    scales: dict[str, float]
    exact: dict[str, int | None]
    lags: list[tuple[float, float]]
    magnified: float


class _Row:
    """Collects what is found about one stored row."""

    def __init__(self, row: Mapping[str, Any], tolerance: float) -> None:
        self.row, self.tolerance = row, tolerance
        self.found: list[Found] = []

    def add(
        self, quantity: str, by: str, stored: object, recomputed: object, *,
        difference: float | None, differs: bool, lag: int = 0,
    ) -> None:  # fmt: skip
        self.found.append(
            Found(
                str(self.row["name"]), str(self.row["specification"]), quantity, by, lag,
                _words(stored), _words(recomputed), difference, differs,
            )
        )  # fmt: skip

    def exact(self, quantity: str, by: str, stored: object, recomputed: object) -> None:
        """Compare what is equal or not."""
        here = None if _missing(stored) else stored
        self.add(quantity, by, here, recomputed, difference=None, differs=here != recomputed)

    def number(
        self, quantity: str, by: str, stored: object, value: float, scale: float, *,
        magnified: float = 1.0, lag: int = 0,
    ) -> None:  # fmt: skip
        """Compare a number with one that was computed again."""
        if _missing(stored) or not np.isfinite(value):
            self.add(
                quantity, by, stored, value, difference=None, differs=True, lag=lag,
            )  # fmt: skip
            return
        here = float(stored)  # type: ignore[arg-type]  # a number of the store
        difference = abs(here - value) / scale if scale > 0 else abs(here - value)
        if quantity.endswith("p_value") and max(here, value) < NOTHING:
            difference = 0.0
        differs = not difference <= self.tolerance * magnified
        self.add(quantity, by, here, value, difference=difference, differs=differs, lag=lag)


def verify_row(
    prepared: Prepared, index: int, row: Mapping[str, Any], lags: pd.DataFrame, tolerance: float
) -> list[Found]:
    """Hold one stored row against everything that can say what it should be.

    Parameters
    ----------
    prepared : Prepared
    index : int
        Row of ``prepared.rows``.
    row : mapping
        Its row of :func:`store.read.sample`.
    lags : pandas.DataFrame
        Its rows of :func:`store.read.sample_details`.
    tolerance : float
        Largest relative difference allowed.
    """
    held = _Row(row, tolerance)
    finding = int(prepared.rows.finding[index])
    code = int(prepared.rows.codes["window"][index])
    positions = prepared.windows[finding][code]
    place = int(prepared.rows.position[index])
    dates = prepared.dataset.calendar.dates
    first, last = dates[int(positions.first[place])], dates[int(positions.last[place])]
    stored = (row["window_start"], row["window_end"])
    told = [None if _missing(day) else pd.Timestamp(day).date() for day in stored]
    held.exact("window", "the plan", f"{told[0]} to {told[1]}", f"{first} to {last}")
    chosen = choices_of(prepared, index, pd.Timestamp(first), pd.Timestamp(last))
    if int(row["status"]) == Status.OK:
        _with_numbers(held, prepared, index, chosen, lags)
    else:
        _without_numbers(held, prepared, index, chosen)
    return held.found


# -- rows without numbers -------------------------------------------------------------------


def _without_numbers(held: _Row, prepared: Prepared, index: int, chosen: OutsideChoices) -> None:
    """Check that a row has no number, and that its reason holds."""
    for name in ("statistic", "p_value", "coefficient_sum", "coefficient_sum_se"):
        if not _missing(held.row[name]):
            held.add(name, "the plan", held.row[name], None, difference=None, differs=True)
    _reason(held, prepared, index, chosen, reverse=False)


def _reason(
    held: _Row, prepared: Prepared, index: int, chosen: OutsideChoices, *, reverse: bool
) -> None:
    """Confirm the stored status and reason of a direction from its rows or the plan's rules."""
    row = held.row
    status = Status(int(row["reverse_status" if reverse else "status"]))
    text = str(row["reason_text"])
    words = f"{status.name.lower().replace('_', ' ')}, {text}"
    if status == Status.FAILED:
        return  # a fault of the program that the store itself reports
    if bool(row["ruled"]):
        number = int(prepared.rows.rule[index])
        because = prepared.plan.rules[number].because if number >= 0 else "no rule of the plan"
        held.exact("status", "the plan", words, f"not applicable, {because}")
        return
    found = obstacles(prepared, chosen, reverse=reverse)
    possible = [f"{REASONS[r][0].name.lower().replace('_', ' ')}, {REASONS[r][1]}" for r in found]
    agreed = words if words in possible else " or ".join(sorted(possible)) or "nothing against it"
    held.exact("status", "statsmodels", words, agreed)


# -- rows with numbers ----------------------------------------------------------------------


def _with_numbers(
    held: _Row, prepared: Prepared, index: int, chosen: OutsideChoices, lags: pd.DataFrame
) -> None:
    procedure = chosen.procedure
    both = int(held.row["reverse_status"]) == Status.OK
    if not both:
        _reason(held, prepared, index, chosen, reverse=True)
    try:
        slow = recheck(prepared, index)
    except ValueError as error:
        held.exact("status", "least squares", "ok", f"no number: {error}")
    else:
        _compare(held, "least squares", _from_slow(slow.forward, procedure), lags, reverse=False)
        if both:
            _compare(held, "least squares", _from_slow(slow.reverse, procedure), lags, reverse=True)
    found = outside(prepared, chosen)
    for reverse in (False, True) if both else (False,):
        direction = found[reverse]
        if direction is None:
            held.exact("status", "statsmodels", "ok", "no number: too few rows")
        else:
            held.exact("status", "statsmodels", "ok", "ok")
            numbers = _from_outside(direction, procedure)
            _compare(held, "statsmodels", numbers, lags, reverse=reverse)


def _compare(
    held: _Row, by: str, computed: _Direction, lags: pd.DataFrame, *, reverse: bool
) -> None:
    prefix = "reverse_" if reverse else ""
    if not reverse:
        for name, whole in computed.exact.items():
            held.exact(name, by, held.row[name], whole)
    for name, number in computed.values.items():
        # The store keeps fewer numbers of the reverse direction.
        if f"{prefix}{name}" in NUMBERS:
            magnified = computed.magnified if name == "p_value" else 1.0
            held.number(
                f"{prefix}{name}", by, held.row[f"{prefix}{name}"], number, computed.scales[name],
                magnified=magnified,
            )  # fmt: skip
    for lag, value, error in _stored_lags(lags, reverse=reverse):
        if lag > len(computed.lags):
            held.exact("lag_coefficient", by, f"a lag {lag}", f"{len(computed.lags)} lags")
            continue
        again, its_error = computed.lags[lag - 1]
        place = -lag if reverse else lag
        scale = max(abs(again), its_error)
        held.number("lag_coefficient", by, value, again, scale, lag=place)
        held.number("lag_standard_error", by, error, its_error, its_error, lag=place)


def _stored_lags(lags: pd.DataFrame, *, reverse: bool) -> Iterator[tuple[int, float, float]]:
    kind = "reverse lag coefficient" if reverse else "lag coefficient"
    for row in lags[lags["kind"] == kind].to_dict("records"):
        yield int(row["position"]), float(row["value"]), float(row["standard_error"])


def _from_slow(direction: SlowDirection, procedure: ProcedureChoice) -> _Direction:
    fit = direction.fit
    coefficients = [float(value) for value in fit.lag_coefficients]
    errors = [float(value) for value in direction.lag_errors]
    return _direction(
        procedure, direction.orders[1], fit.observations, direction.df_num, direction.df_den,
        direction.statistic, direction.p_value, direction.coefficient_sum,
        direction.coefficient_sum_error, direction.partial_r2, None, coefficients, errors,
    )  # fmt: skip


def _from_outside(direction: OutsideDirection, procedure: ProcedureChoice) -> _Direction:
    return _direction(
        procedure, direction.order, direction.observations, direction.df_num, direction.df_den,
        direction.statistic, direction.p_value, direction.coefficient_sum,
        direction.coefficient_sum_error, direction.partial_r2, direction.standardised_sum,
        direction.lag_values.tolist(), direction.lag_errors.tolist(),
    )  # fmt: skip


def _direction(
    procedure: ProcedureChoice, order: int, observations: int, q: int, df_den: int | None,
    statistic: float, p_value: float, total: float, error: float, partial_r2: float,
    standardised_sum: float | None, coefficients: list[float], errors: list[float],
) -> _Direction:  # fmt: skip
    by_chance = 1.0 if (procedure.form or procedure.statistic) == "F" else float(q)
    values = {
        "statistic": statistic, "p_value": p_value, "coefficient_sum": total,
        "coefficient_sum_se": error, "signed_partial_r2": float(np.sign(total)) * partial_r2,
    }  # fmt: skip
    scales = {
        "statistic": max(statistic, FLOOR * by_chance), "p_value": max(p_value, NOTHING),
        "coefficient_sum": max(abs(total), error), "coefficient_sum_se": error,
        "signed_partial_r2": max(partial_r2, FLOOR * q / observations),
    }  # fmt: skip
    if standardised_sum is not None:
        values["standardised_sum"] = standardised_sum
        noise = error / abs(total) if total else 1.0
        scales["standardised_sum"] = abs(standardised_sum) * max(1.0, noise)
    exact = {"order_used": order, "observations": observations, "df_num": q, "df_den": df_den}
    lags = list(zip(coefficients, errors, strict=True))
    return _Direction(values, scales, exact, lags, _magnified(statistic, q, df_den))


def _magnified(statistic: float, q: int, df_den: int | None) -> float:
    """Return x·f(x)/(1 − F(x)), what a tail makes of a relative difference; 1 at the least."""
    from scipy import stats

    law = stats.chi2(q) if df_den is None else stats.f(q, df_den)
    tail = float(law.sf(statistic))
    if tail < NOTHING:
        return max(statistic, 1.0)  # the elasticity of a chi-square's far tail is x/2
    return max(statistic * float(law.pdf(statistic)) / tail, 1.0)


def _words(value: object) -> str:
    if _missing(value):
        return "nothing"
    return f"{value:.12g}" if isinstance(value, float) else str(value)


def _missing(value: object) -> bool:
    """Return True for None and whatever pandas holds to be missing."""
    return bool(pd.isna(value))  # type: ignore[call-overload]  # a single value
