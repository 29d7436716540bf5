"""The errors that a user can meet, each with the exit code of the command line."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["CrosswindError", "Fault", "InputFault", "Interrupted", "RuleNotMet"]


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong with what the user gave.

    Attributes
    ----------
    place : str
        Where: a path in the plan (``axes.lags[2]``), a file and line, an option.
    problem : str
        What is wrong there, in words, without a full stop at the end.
    mend : str
        What to do about it; may be empty.
    """

    place: str
    problem: str
    mend: str = ""

    def __str__(self) -> str:
        stop = "" if self.problem.endswith("?") else "."
        text = f"{self.place}: {self.problem}{stop}"
        return f"{text} {self.mend}" if self.mend else text


class CrosswindError(Exception):
    """Base of every error that is reported without a traceback."""

    exit_code = 1


class InputFault(CrosswindError):
    """Bad usage, plan or data; carries every fault that was found at once.

    Parameters
    ----------
    faults : Fault
        One or more faults, in the order in which they should be read.
    """

    exit_code = 2

    def __init__(self, *faults: Fault) -> None:
        self.faults: tuple[Fault, ...] = faults
        super().__init__("\n".join(str(fault) for fault in faults))


class RuleNotMet(CrosswindError):
    """A rule given with ``--require`` does not hold."""

    exit_code = 4


class Interrupted(CrosswindError):
    """The user stopped a run; what was written stays and the run can be resumed."""

    exit_code = 130
