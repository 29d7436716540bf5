"""One frozen record for a choice of each axis.

A choice says what is meant, not how it was written: shorthands are already expanded
and options that equal their registered default are left out of ``meaning``.  Choices
exist once for each entry of an axis, never once for each specification.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

from sweep.kernels.longrun import LongRun

__all__ = [
    "AXES",
    "Choice",
    "ConditioningChoice",
    "DeterministicChoice",
    "LagChoice",
    "MeasureChoice",
    "ProcedureChoice",
    "TransformationChoice",
    "WindowChoice",
]

# Axis names as they are written in the store and in every table, in plan order.
AXES = (
    "lags",
    "deterministics",
    "window",
    "transformation",
    "test",
    "conditioning",
    "measures",
)


@dataclass(frozen=True, slots=True)
class Choice:
    """What every choice has: a label for people and a meaning for the digest.

    Attributes
    ----------
    label : str
        The words that tables and charts show.
    meaning : dict
        Canonical content (plain JSON values); equal meanings are the same choice.
    because : str
        The author's reason for the choice; not part of the meaning.
    """

    label: str
    meaning: dict[str, Any] = field(hash=False)
    because: str = ""


@dataclass(frozen=True, slots=True)
class LagChoice(Choice):
    """How many lags, or which rule picks the number.

    Attributes
    ----------
    own, cause, given : int
        Fixed orders in periods (0 when a criterion picks one order for all).
    criterion : str
        ``""`` or one of ``AIC``, ``BIC``, ``HQ``, ``FPE``, ``sequential LR``.
    maximum : int
        Largest order that the criterion considers.
    scope : str
        ``system`` (determinant of the residual covariance) or ``equation``.
    common : int
        0 for the order's own sample; otherwise the order whose sample is used.
    level : float
        Level of the sequential likelihood-ratio test.
    """

    own: int = 0
    cause: int = 0
    given: int = 0
    criterion: str = ""
    maximum: int = 0
    scope: str = "system"
    common: int = 0
    level: float = 0.05


@dataclass(frozen=True, slots=True)
class DeterministicChoice(Choice):
    """Deterministic terms of the regression.

    Attributes
    ----------
    trend : int
        -1 none, 0 constant, 1 linear trend, 2 quadratic trend (lower terms included).
    seasonal : bool
        Centred seasonal dummies, one fewer than the seasons of the year.
    steps, pulses : tuple of str
        Canonical period labels.
    fourier : int
        Number of frequencies; the window's length is the period.
    """

    trend: int = 0
    seasonal: bool = False
    steps: tuple[str, ...] = ()
    pulses: tuple[str, ...] = ()
    fourier: int = 0


@dataclass(frozen=True, slots=True)
class WindowChoice(Choice):
    """Which dates are used.

    Attributes
    ----------
    first, last : str
        Canonical period labels that bound the sample, ``""`` where open.
    without : tuple of (str, str)
        Inclusive episodes that no regression row may touch.
    drop_first, drop_last : float
        Shares of the sample left out at its ends, in [0, 1).
    moving : str
        ``""``, ``rolling``, ``expanding`` or ``shrinking``.
    length, step : int
        Window length (the shortest one for expanding and shrinking) and step, in periods.
    """

    first: str = ""
    last: str = ""
    without: tuple[tuple[str, str], ...] = ()
    drop_first: float = 0.0
    drop_last: float = 0.0
    moving: str = ""
    length: int = 0
    step: int = 1


@dataclass(frozen=True, slots=True)
class TransformationChoice(Choice):
    """The scale on which each series enters.

    Attributes
    ----------
    default : str
        Name of the transformation of every series not listed in ``series``.
    series : tuple of (str, str)
        Role or column name and its transformation, sorted by name.
    smoothing : float
        Hodrick-Prescott smoothing parameter, 0.0 for the frequency's usual one.
    horizon : int
        Hamilton horizon in periods, 0 for two years of the frequency.
    """

    default: str = "level"
    series: tuple[tuple[str, str], ...] = ()
    smoothing: float = 0.0
    horizon: int = 0

    def of(self, role: str) -> str:
        """Return the transformation of one series."""
        return dict(self.series).get(role, self.default)


@dataclass(frozen=True, slots=True)
class ProcedureChoice(Choice):
    """The statistic and its reference law.

    Attributes
    ----------
    statistic : str
        ``F``, ``Wald``, ``LR``, ``LM`` or ``lag augmented``.
    covariance : str
        ``classical``, ``HC0``, ``HC1``, ``HC2``, ``HC3`` or ``HAC``.
    divisor : str
        ``T-k`` or ``T`` (classical Wald only).
    extra_lags : int
        Lags that the regression has beyond the tested ones; 0 unless it is augmented.
    form : str
        ``F`` or ``Wald``: statistic and law of an augmented test; empty otherwise.
    kernel : str
        ``Bartlett`` or ``quadratic spectral`` under HAC; empty otherwise.
    bandwidth : float or str
        Periods, or ``Newey-West`` or ``Andrews``, under HAC.
    small_sample : bool
        Whether a HAC covariance is scaled by T/(T − k).
    """

    statistic: str = "F"
    covariance: str = "classical"
    divisor: str = "T-k"
    extra_lags: int = 0
    form: str = ""
    kernel: str = ""
    bandwidth: float | str = 0.0
    small_sample: bool = False

    @property
    def sandwich(self) -> str | LongRun:
        """What the kernels know the covariance by."""
        if self.covariance == "HAC":
            return LongRun(self.kernel, self.bandwidth, self.small_sample)
        return self.covariance


@dataclass(frozen=True, slots=True)
class ConditioningChoice(Choice):
    """Which of the finding's given series stay in the regression.

    Attributes
    ----------
    without : tuple of str
        Given series left out, sorted; all of them for ``pairwise``.
    """

    without: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class MeasureChoice(Choice):
    """Which column stands for each role.

    Attributes
    ----------
    columns : tuple of (str, str)
        Role and column, sorted by role; roles not listed are columns of that name.
    inverted : tuple of str
        Roles whose column runs the other way, so that the sign of an effect turns.
    """

    columns: tuple[tuple[str, str], ...] = ()
    inverted: tuple[str, ...] = ()

    def column(self, role: str) -> str:
        """Return the column that stands for a role."""
        return dict(self.columns).get(role, role)
