"""One specification in full: its rows, its regression, its numbers by both paths, in words."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from sweep.engine.feasible import FREEDOM_FOR_CRITERION
from sweep.engine.prepare import Prepared
from sweep.engine.recheck import SlowDirection, SlowResult, recheck
from sweep.engine.stored import prepared_again, row_of
from sweep.notebook import explanation_html
from sweep.panel.periods import period_label
from sweep.plan.choices import AXES, ConditioningChoice, LagChoice
from sweep.procedures import PROCEDURES

if TYPE_CHECKING:
    from sweep.results import Results

__all__ = ["Compared", "Explanation", "explain"]


@dataclass(frozen=True, slots=True)
class Compared:
    """A stored number beside the same number by the slow path.

    Attributes
    ----------
    name : str
    stored, slow : float or None
    """

    name: str
    stored: float | None
    slow: float | None

    @property
    def difference(self) -> float | None:
        """Relative difference, None where one is missing."""
        if self.stored is None or self.slow is None:
            return None
        return abs(self.stored - self.slow) / max(abs(self.slow), 1e-300)


@dataclass(frozen=True, slots=True, repr=False)
class Explanation:
    """Everything known about one specification.

    Attributes
    ----------
    row : mapping
        Its row of the view ``outcomes``.
    statement : str
        The finding in words.
    choices : tuple of (axis, label, reason)
    sample : tuple of str
        Sentences on window and regression rows.
    regression : tuple of str
        Sentences on the equation and the lag choice.
    null : str
        The hypothesis in words.
    compared : tuple of Compared
        Empty where the specification has no numbers.
    coefficients : tuple of (lag, value, standard error)
        Of the cause in the effect's equation, by the slow path.
    verdict : tuple of str
    """

    row: dict[str, Any]
    statement: str
    choices: tuple[tuple[str, str, str], ...]
    sample: tuple[str, ...]
    regression: tuple[str, ...]
    null: str
    compared: tuple[Compared, ...]
    coefficients: tuple[tuple[int, float, float], ...]
    verdict: tuple[str, ...]

    def __repr__(self) -> str:
        sentences = (*self.sample, *self.regression, f"Hypothesis: {self.null}.", *self.verdict)
        numbers = (f"{c.name}: stored {c.stored}, recomputed {c.slow}" for c in self.compared)
        head = f"{self.statement}: specification {self.row['specification']}"
        return "\n".join([head, *sentences, *numbers])

    def _repr_html_(self) -> str:
        return explanation_html(self)


def explain(
    results: Results, specification: str, finding: str | int | None, data: Path | None
) -> Explanation:
    """Explain one stored specification; see :meth:`sweep.results.Results.explain`."""
    row = results.specification(specification, finding)
    prepared = prepared_again(results, data)
    number = next(f.number for f in prepared.plan.findings if f.name == row["finding"])
    index = row_of(prepared, number, str(row["specification"]))
    plan = prepared.plan
    found = plan.findings[number]
    choices = tuple(
        (axis, choice.label, choice.because)
        for axis in AXES
        for choice in [plan.axes[axis][int(prepared.rows.codes[axis][index])]]
    )
    procedure = plan.axes["test"][int(prepared.rows.codes["test"][index])]
    null = PROCEDURES[getattr(procedure, "statistic")].NULL  # noqa: B009  (a Choice to mypy)
    slow: SlowResult | None = None
    if row["status"] == "ok":
        slow = recheck(prepared, index)
    return Explanation(
        row,
        found.sentence,
        choices,
        tuple(_sample(prepared, row, slow)),
        tuple(_regression(prepared, index, slow)),
        f"{null} ({found.cause} → {found.effect}; in reverse likewise)",
        tuple(_compare(row, slow)) if slow is not None else (),
        _coefficients(slow),
        tuple(_verdict(row)),
    )


def _sample(prepared: Prepared, row: dict[str, Any], slow: SlowResult | None) -> list[str]:
    calendar = prepared.dataset.calendar
    frequency = calendar.frequency
    start, end = (period_label(row[name], frequency) for name in ("window_start", "window_end"))
    sentences = [f"The window runs from {start} to {end} before lags are taken."]
    if slow is None:
        return sentences
    rows = slow.rows
    sentences.append(
        f"The regression uses T = {_counted(rows.size, 'row')}, "
        f"{calendar.label(int(rows[0]))} to {calendar.label(int(rows[-1]))}."
    )
    missing = int(rows[-1] - rows[0] + 1 - rows.size)
    if missing:
        touch = "touches an episode left out and is" if missing == 1 else (
            "touch an episode left out and are"
        )
        sentences.append(f"{_counted(missing, 'row')} between them {touch} dropped.")
    return sentences


def _regression(prepared: Prepared, index: int, slow: SlowResult | None) -> list[str]:
    plan = prepared.plan
    choice = plan.axes["lags"][int(prepared.rows.codes["lags"][index])]
    assert isinstance(choice, LagChoice)
    if slow is None:
        return []
    own, cause, given = slow.forward.orders
    sentences = []
    if choice.criterion:
        scope = "the effect's equation" if choice.scope == "equation" else "the whole system"
        table = slow.forward.criterion_table
        assert table is not None
        largest = table.size - 1
        sentences.append(
            f"{choice.criterion} of {scope} chose {_counted(own, 'lag')} among 1 to {largest}, "
            "compared on their common sample."
        )
        if largest < choice.maximum:
            sentences.append(
                f"Orders up to {choice.maximum} were to be considered; {largest} is the largest "
                f"that leaves {FREEDOM_FOR_CRITERION} degrees of freedom."
            )
    fit = slow.forward.fit
    left_out = plan.axes["conditioning"][int(prepared.rows.codes["conditioning"][index])]
    assert isinstance(left_out, ConditioningChoice)
    held = len(plan.findings[int(prepared.rows.finding[index])].given) - len(left_out.without)
    others = f"{given} of {'the' if held == 1 else 'each'} given series, " if held else ""
    sentences.append(
        f"The effect's equation has k = {_counted(fit.regressors, 'regressor')}: "
        f"{_counted(own, 'own lag')}, {_counted(cause, 'lag')} of the cause, {others}and the "
        "deterministic terms."
    )
    sentences.append(
        f"Restricted and unrestricted sums of squares: s0 = {fit.restricted_squares:.8g}, "
        f"s1 = {fit.unrestricted_squares:.8g}."
    )
    return sentences


def _counted(count: int, noun: str) -> str:
    return f"{count} {noun}{'' if count == 1 else 's'}"


def _compare(row: dict[str, Any], slow: SlowResult) -> list[Compared]:
    forward, reverse = slow.forward, slow.reverse
    sign = np.sign(forward.coefficient_sum)
    pairs = [
        ("statistic", forward.statistic),
        ("p_value", forward.p_value),
        ("coefficient_sum", forward.coefficient_sum),
        ("coefficient_sum_se", forward.coefficient_sum_error),
        ("signed_partial_r2", float(sign * forward.partial_r2)),
        *_reverse_pairs(row, reverse),
    ]
    compared = []
    for name, value in pairs:
        stored = row[name]
        known = stored is not None and stored == stored  # noqa: PLR0124 - NaN is not itself
        compared.append(Compared(name, float(stored) if known else None, value))
    return compared


def _reverse_pairs(row: dict[str, Any], reverse: SlowDirection) -> list[tuple[str, float]]:
    if row["reverse_status"] != "ok":
        return []
    return [("reverse_statistic", reverse.statistic), ("reverse_p_value", reverse.p_value)]


def _coefficients(slow: SlowResult | None) -> tuple[tuple[int, float, float], ...]:
    if slow is None:
        return ()
    values, errors = slow.forward.fit.lag_coefficients, slow.forward.lag_errors
    return tuple(
        (lag, float(value), float(error))
        for lag, (value, error) in enumerate(zip(values, errors, strict=True), start=1)
    )


def _verdict(row: dict[str, Any]) -> list[str]:
    if row["status"] != "ok":
        return [f"No number: {row['status']}, because {row['reason']}."]
    sentences = []
    if row["failed_screens"]:
        sentences.append(f"Screens not passed: {row['failed_screens']}.")
    admissible = bool(row["admissible"])
    sentences.append("It is admissible." if admissible else "It is not admissible.")
    survives = row["survives"]
    if admissible and survives is not None:
        sentences.append("The claim holds in it." if survives else "The claim does not hold in it.")
    sentences.append(f"Direction: {row['verdict']}.")
    return sentences
