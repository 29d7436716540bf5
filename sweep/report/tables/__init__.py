"""The tables: one file each and the dictionary that names them.

A table is a module with ``NAME``, ``SHOWS`` (what, in a few words), ``NEEDS`` (the frames it
reads, named as the functions of ``store.read``) and ``build(frames, context)``, which returns
the plain model that the writers turn into HTML, LaTeX, Markdown or CSV.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Protocol

from . import (
    attrition,
    baseline,
    directions,
    effects,
    effects_overall,
    episodes,
    flips,
    requests,
    shortest_flips,
    single_changes,
    survival,
)
from .model import Column, Table
from .writers import WRITERS

if TYPE_CHECKING:
    from collections.abc import Mapping

    import pandas as pd

    from sweep.charts.context import Context

__all__ = ["TABLES", "WRITERS", "Column", "Table", "TableModule"]


class TableModule(Protocol):
    """What every table's module provides."""

    @property
    def NAME(self) -> str:  # noqa: N802 - a constant of the module
        """Name in the family."""

    @property
    def NEEDS(self) -> tuple[str, ...]:  # noqa: N802 - a constant of the module
        """Frames that it reads."""

    @property
    def SHOWS(self) -> str:  # noqa: N802 - a constant of the module
        """What it shows, in a few words."""

    def build(self, frames: Mapping[str, pd.DataFrame], context: Context) -> Table:
        """Return the table of one finding."""


_MODULES: tuple[TableModule, ...] = (
    baseline,
    survival,
    single_changes,
    flips,
    shortest_flips,
    directions,
    effects_overall,
    effects,
    attrition,
    episodes,
    requests,
)

# Name of the table and its module, in the order of the report.
TABLES: dict[str, TableModule] = {module.NAME: module for module in _MODULES}
