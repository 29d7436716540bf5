"""One small model for every table, whatever it is written as."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any, Literal

from sweep.verdicts.words import MISSING, missing, number, p_text, percent, period_text

__all__ = ["Column", "Table", "Target", "cell_text"]

Kind = Literal["text", "count", "share", "p", "number", "date", "mark"]

# Where a column appears: on the page, in print (LaTeX, Markdown), in data files (CSV).
Target = Literal["page", "print", "data"]
_EVERYWHERE: tuple[Target, ...] = ("page", "print", "data")


@dataclass(frozen=True, slots=True)
class Column:
    """One column.

    Attributes
    ----------
    heading : str
        Words above it.
    kind : str
        How its values are written: text, count, share (0–1, written in per cent), p,
        number (three significant digits), date, or mark (a diamond where true).
    name : str
        Its name in data files, lower case with underscores.
    within : tuple of str
        Where it appears: ``page``, ``print``, ``data``.  Print has less room than a page that
        scrolls, and a data file wants parts that print puts into one cell.
    """

    heading: str
    kind: Kind = "text"
    name: str = ""
    within: tuple[Target, ...] = _EVERYWHERE

    @property
    def field(self) -> str:
        """Return the column's name in data files."""
        return self.name or self.heading.lower().replace(" ", "_").replace("-", "_")

    @property
    def right(self) -> bool:
        """Whether values are set flush right."""
        return self.kind not in ("text", "date", "mark")


@dataclass(frozen=True, slots=True)
class Table:
    """A table before it is written in any format.

    Attributes
    ----------
    name : str
        Its name in the family.
    title : str
        Caption, a sentence that stands alone.
    columns : tuple of Column
        From left to right.
    rows : tuple of tuple
        Plain values, one for each column; None where there is none.
    notes : tuple of str
        Sentences below the table: what is counted, what was left out.
    grouped : bool
        Whether rows with the same value in the first column stand under one heading.
    """

    name: str
    title: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Any, ...], ...]
    notes: tuple[str, ...] = ()
    grouped: bool = False

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.columns):
                raise ValueError(
                    f"table {self.name}: a row has {len(row)} values for "
                    f"{len(self.columns)} columns"
                )

    def only(self, target: Target) -> Table:
        """Return the table with the columns that appear in one place."""
        kept = [place for place, column in enumerate(self.columns) if target in column.within]
        if len(kept) == len(self.columns):
            return self
        return replace(
            self,
            columns=tuple(self.columns[place] for place in kept),
            rows=tuple(tuple(row[place] for place in kept) for row in self.rows),
        )

    def first(self, rows: int | None) -> Table:
        """Return the table with its first rows, the count left out said in the notes.

        Parameters
        ----------
        rows : int or None
            Most rows to keep; None for all.
        """
        if rows is None or len(self.rows) <= rows:
            return self
        left = len(self.rows) - rows
        note = f"The first {rows:,} of {len(self.rows):,} rows are shown; {left:,} left out."
        return replace(self, rows=self.rows[:rows], notes=(*self.notes, note))

    def _repr_html_(self) -> str:
        from .writers import as_html

        return as_html(self)


def cell_text(value: Any, kind: Kind) -> str:
    """Write one value the way people read it."""
    if kind == "mark":
        return "◆" if not missing(value) and value else ""
    if missing(value) or value == "":
        return MISSING
    if kind == "count":
        return f"{int(value):,}"
    if kind == "share":
        return percent(float(value))
    if kind == "p":
        return p_text(float(value))
    if kind == "number":
        return number(float(value))
    if kind == "date":
        return period_text(value)
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value)
