"""The tables: one file each and the dictionary that names them.

A table is a module with ``NAME``, ``SHOWS`` (what, in a few words), ``NEEDS`` (the frames it
reads, named as the functions of ``store.read``) and ``build(frames, context)``, which returns
the plain model that the writers turn into HTML, LaTeX, Markdown or CSV.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Protocol

from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion

from . import (
    alternatives,
    attrition,
    baseline,
    directions,
    effects,
    effects_overall,
    episodes,
    flips,
    lag_selection,
    long_list,
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

__all__ = ["PAGE_TABLES", "TABLES", "WRITERS", "Column", "Table", "TableModule", "table_named"]


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


# What the report shows, in its order.
_ON_PAGE: tuple[TableModule, ...] = (
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

# What is asked for by name alone: too long for a page, or made from the data file.
_BESIDE: tuple[TableModule, ...] = (
    alternatives,
    lag_selection,
    long_list,
)

# Name of the table and its module: those of the page, and all.
PAGE_TABLES: dict[str, TableModule] = {module.NAME: module for module in _ON_PAGE}
TABLES: dict[str, TableModule] = {module.NAME: module for module in (*_ON_PAGE, *_BESIDE)}


def table_named(name: str) -> TableModule:
    """Return the module of a table.

    Parameters
    ----------
    name : str
        A key of ``TABLES``; hyphens or underscores may stand for its spaces.

    Raises
    ------
    InputFault
        If there is no table of that name.
    """
    words = " ".join(name.replace("-", " ").replace("_", " ").lower().split())
    if words not in TABLES:
        message = f'no table is called "{name}"' + suggestion(words, TABLES)
        raise InputFault(Fault("table", message))
    return TABLES[words]
