"""The figures: one file each and the dictionary that names them.

A chart is a module with ``NAME``, ``QUESTION``, ``NEEDS`` (the frames it reads, named as the
functions of ``store.read``), ``build(frames, context, width)`` and
``describe(frames, context)``.  The dictionary imports a module when it is first asked for,
so that the command line starts without the drawing library.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Protocol, cast

if TYPE_CHECKING:
    from collections.abc import Mapping

    import pandas

    from .context import Context
    from .marks import Specification

__all__ = ["CHARTS", "ChartModule", "absent", "chart"]


class ChartModule(Protocol):
    """What every chart's module provides."""

    NAME: str
    QUESTION: str
    NEEDS: tuple[str, ...]

    def build(
        self, frames: Mapping[str, pandas.DataFrame], context: Context, width: str = "wide"
    ) -> Specification:
        """Return the figure at a named print width (``narrow`` 85 mm, ``wide`` 175 mm)."""

    def describe(self, frames: Mapping[str, pandas.DataFrame], context: Context) -> str:
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
