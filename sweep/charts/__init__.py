"""The figures: one file each and the dictionary that names them.

A chart is a module with ``NAME``, ``QUESTION``, ``NEEDS`` (the frames it reads, named as the
functions of ``store.read``), ``build(frames, context, width)`` and
``describe(frames, context)``.  It may have ``OPTIONS`` (names of further arguments of these
two), ``absent(frames)`` and ``numbers(frames, context)``.  The dictionary imports a module when
it is first asked for, so that the command line starts without the drawing library.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any, Protocol, cast

if TYPE_CHECKING:
    from collections.abc import Mapping

    import pandas

    from .context import Context
    from .marks import Specification

__all__ = ["CHARTS", "ChartModule", "absent", "chart", "named", "numbers"]


class ChartModule(Protocol):
    """What every chart's module provides."""

    NAME: str
    QUESTION: str
    NEEDS: tuple[str, ...]

    def build(
        self,
        frames: Mapping[str, pandas.DataFrame],
        context: Context,
        width: str = "wide",
        **options: Any,
    ) -> Specification:
        """Return the figure at a named print width (``narrow`` 85 mm, ``wide`` 175 mm)."""

    def describe(
        self, frames: Mapping[str, pandas.DataFrame], context: Context, **options: Any
    ) -> str:
        """Return the text alternative, made from the same numbers."""


# Name of the chart and its module, in the order of the report.
CHARTS: dict[str, str] = {
    "survival by choice": "survival_by_choice",
    "two axes": "two_axes",
    "single changes": "single_changes",
    "flips": "flips",
    "windows": "windows",
    "episodes": "episodes",
    "directions": "directions",
    "specification curve": "specification_curve",
    "attrition": "attrition",
}


def absent(name: str, frames: Mapping[str, pandas.DataFrame]) -> str:
    """Say in a sentence why a chart has nothing to show; empty where it has something.

    A chart's module may have a function ``absent(frames)``; others always have something.
    """
    said = getattr(chart(name), "absent", None)
    return str(said(frames)) if said is not None else ""


def named(name: str) -> str:
    """Return the name of a chart as ``CHARTS`` has it; hyphens may stand for its spaces.

    Raises
    ------
    InputFault
        If there is no chart of that name.

    Examples
    --------
    >>> named("two-axes")
    'two axes'
    """
    from sweep.errors import Fault, InputFault
    from sweep.plan.suggest import suggestion

    plain = " ".join(name.replace("-", " ").split()).lower()
    if plain not in CHARTS:
        message = f'no chart is called "{name}"' + suggestion(plain, CHARTS)
        raise InputFault(Fault("chart", message))
    return plain


def numbers(
    name: str, frames: Mapping[str, pandas.DataFrame], context: Context, **options: Any
) -> pandas.DataFrame:
    """Return what a chart is drawn from, nothing thinned.

    A chart's module may have a function ``numbers(frames, context)`` that takes the chart's
    options; of others it is the first of the frames that they need.
    """
    module = chart(name)
    own = getattr(module, "numbers", None)
    if own is None:
        return frames[module.NEEDS[0]]
    found: pandas.DataFrame = own(frames, context, **options)
    return found


def chart(name: str) -> ChartModule:
    """Return the module of a chart.

    Parameters
    ----------
    name : str
        A key of ``CHARTS``.

    Raises
    ------
    KeyError
        If there is no chart of that name.
    """
    return cast("ChartModule", import_module(f"{__name__}.{CHARTS[name]}"))
