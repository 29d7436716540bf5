"""Why a specification has no number: worker codes, each with its status and its words."""

from __future__ import annotations

from enum import IntEnum

from sweep.kernels.stacks import Flag
from sweep.panel.windows import Lack

__all__ = ["FLAG_REASON", "REASONS", "REASON_OF_LACK", "RULED", "Reason", "Status"]


class Status(IntEnum):
    """Status of a specification; never failed without a fault of ours."""

    OK = 0
    NOT_APPLICABLE = 1
    INFEASIBLE = 2
    FAILED = 3


class Reason(IntEnum):
    """Reasons known to the workers; rules of the plan come after ``RULED``."""

    NONE = 0
    TOO_FEW_ROWS = 1
    CONSTANT_SERIES = 2
    COLLINEAR = 3
    EXACT_FIT = 4
    LEVERAGE = 5
    SHORT_FOR_CRITERION = 6
    TERM = 7
    FILTER_EPISODE = 8
    NO_COVARIANCE = 9
    NO_NUMBER = 10
    AUGMENTED_SCALE = 11
    NO_DATES = 12
    LONGER_THAN_SAMPLE = 13


REASONS: dict[Reason, tuple[Status, str]] = {
    Reason.TOO_FEW_ROWS: (Status.INFEASIBLE, "fewer observations than the regression needs"),
    Reason.CONSTANT_SERIES: (Status.INFEASIBLE, "a series does not move within the window"),
    Reason.COLLINEAR: (Status.INFEASIBLE, "the regressors are collinear within the window"),
    Reason.EXACT_FIT: (Status.INFEASIBLE, "the regression fits the effect exactly"),
    Reason.LEVERAGE: (
        Status.INFEASIBLE,
        "an observation is fitted exactly, so this sandwich covariance does not exist",
    ),
    Reason.SHORT_FOR_CRITERION: (
        Status.INFEASIBLE,
        "the window is too short for a criterion: no order leaves 20 degrees of freedom",
    ),
    Reason.TERM: (
        Status.NOT_APPLICABLE,
        "a step, pulse, seasonal or Fourier term is constant or collinear within the window",
    ),
    Reason.FILTER_EPISODE: (
        Status.NOT_APPLICABLE,
        "the Hodrick-Prescott filter uses every value of the window, so none is free of the "
        "episode left out",
    ),
    Reason.NO_COVARIANCE: (Status.INFEASIBLE, "the covariance of the cause's lags is singular"),
    Reason.AUGMENTED_SCALE: (
        Status.NOT_APPLICABLE,
        "a lag augmented test takes the series in levels or logarithms, not changed otherwise",
    ),
    Reason.NO_DATES: (
        Status.INFEASIBLE,
        "the window leaves no date at which all series of the finding exist",
    ),
    Reason.LONGER_THAN_SAMPLE: (
        Status.INFEASIBLE,
        "the moving window is longer than the sample of the finding",
    ),
    Reason.NO_NUMBER: (Status.FAILED, "the computation gave no finite number"),
}
RULED = 100
"""Rule r of the plan is reason ``RULED + r`` while rows travel; the store has its own codes."""

REASON_OF_LACK = {
    Lack.NOTHING: Reason.NONE,
    Lack.DATES: Reason.NO_DATES,
    Lack.LENGTH: Reason.LONGER_THAN_SAMPLE,
}

FLAG_REASON = {
    Flag.FINE: Reason.NONE,
    Flag.TOO_FEW_ROWS: Reason.TOO_FEW_ROWS,
    Flag.CONSTANT_SERIES: Reason.CONSTANT_SERIES,
    Flag.COLLINEAR: Reason.COLLINEAR,
    Flag.EXACT_FIT: Reason.EXACT_FIT,
}
