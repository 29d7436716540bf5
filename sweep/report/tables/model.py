"""One small model for every table, whatever it is written as."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from itertools import islice
from pathlib import Path
from typing import Any, Literal

from sweep.verdicts.words import MISSING, fixed, missing, number, p_text, percent, period_text

__all__ = [
    "PRINT_ROWS", "Column", "Kind", "Pooled", "Table", "Target", "cell_text", "pooled", "stars_of",
]  # fmt: skip

Kind = Literal["text", "count", "share", "p", "number", "fixed", "figure", "date", "mark"]

# Rows of a table in print, unless another count is asked for.
PRINT_ROWS = 500

# Where a column appears: on the page, in print (LaTeX, Markdown), in data files (CSV).
Target = Literal["page", "print", "data"]
_EVERYWHERE: tuple[Target, ...] = ("page", "print", "data")
# Levels of the stars, most stars first.
_STARS = ((0.01, "***"), (0.05, "**"), (0.10, "*"))
_LEGEND = "Stars: * p at most 0.10, ** at most 0.05, *** at most 0.01; none on medians."
_NO_STARS = "No column of this table is marked by stars."


class Pooled(float):
    """A number that stands for several specifications, such as a median p: it has no stars."""


@dataclass(frozen=True, slots=True)
class Column:
    """One column.

    Attributes
    ----------
    heading : str
        Words above it.
    kind : str
        How its values are written: text, count, share (0–1, written in per cent), p,
        number (three significant digits), fixed (three decimals), figure (words that are set
        like a number), date, or mark (a diamond where true).
    name : str
        Its name in data files, lower case with underscores.
    within : tuple of str
        Where it appears: ``page``, ``print``, ``data``.  Print has less room than a page that
        scrolls, and a data file wants parts that print puts into one cell.
    starred : bool
        Whether its p-values are those of tests, which get stars where they are asked for.
    frequency : str
        Frequency by which its dates are named for readers; ISO days where it is empty.
    """

    heading: str
    kind: Kind = "text"
    name: str = ""
    within: tuple[Target, ...] = _EVERYWHERE
    starred: bool = False
    frequency: str = ""

    @property
    def field(self) -> str:
        """Return the column's name in data files."""
        return self.name or self.heading.lower().replace(" ", "_").replace("-", "_")

    @property
    def right(self) -> bool:
        """Whether values are set flush right."""
        return self.kind not in ("text", "date", "mark")

    def text(self, value: Any) -> str:
        """Write one of its values the way people read it."""
        if self.kind == "date":
            return period_text(value, self.frequency)
        return cell_text(value, self.kind)


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
    page_rows : int or None
        Most rows on the page, for a list whose first rows say most; None for the page's own limit.
    stars : bool
        Whether print marks small p-values by stars.
    total : int or None
        Rows that there are, where ``rows`` holds only the first of them; None if it holds all.
    stream : callable or None
        Gives every row, one after the other, where there may be too many to hold.
    """

    name: str
    title: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Any, ...], ...]
    notes: tuple[str, ...] = ()
    grouped: bool = False
    page_rows: int | None = None
    stars: bool = False
    total: int | None = None
    stream: Callable[[], Iterator[tuple[Any, ...]]] | None = field(
        default=None, compare=False, repr=False
    )

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.columns):
                raise ValueError(
                    f"table {self.name}: a row has {len(row)} values for "
                    f"{len(self.columns)} columns"
                )

    def text(self, form: str = "markdown") -> str:
        """Return the table as text.

        Parameters
        ----------
        form : str
            ``latex``, ``markdown``, ``csv`` or ``html``.  In print at most 500 rows are written,
            unless another count was asked for; CSV holds them all.
        """
        return "".join(self.parts(form))

    def parts(self, form: str = "markdown") -> Iterator[str]:
        """Yield the text of the table in parts, which bounds the memory of a long one."""
        from .writers import parts

        return parts(self, form)

    def save(self, path: str | Path, form: str | None = None) -> Path:
        """Write the table to a file and return its path; see :mod:`sweep.report.tables.saving`.

        Parameters
        ----------
        path : str or Path
            Its ending says how it is written: .tex, .md, .csv or .html.
        form : str or None
            ``latex``, ``markdown``, ``csv`` or ``html``, whatever the ending.
        """
        from .saving import save

        return save(self, Path(path), form)

    def _repr_html_(self) -> str:
        return self.text("html")

    def only(self, target: Target) -> Table:
        """Return the table with the columns that appear in one place."""
        kept = [place for place, column in enumerate(self.columns) if target in column.within]
        if len(kept) == len(self.columns):
            return self
        stream = self.stream

        def pick(rows: Iterable[tuple[Any, ...]]) -> Iterator[tuple[Any, ...]]:
            return (tuple([row[place] for place in kept]) for row in rows)

        return replace(
            self,
            columns=tuple(self.columns[place] for place in kept),
            rows=tuple(pick(self.rows)),
            stream=None if stream is None else lambda: pick(stream()),
        )

    def dated(self, frequency: str) -> Table:
        """Return the table with dates named as the data's own periods; data files keep days."""
        columns = tuple(
            replace(column, frequency=frequency) if column.kind == "date" else column
            for column in self.columns
        )
        return replace(self, columns=columns)

    def first(self, rows: int | None) -> Table:
        """Return the table with its first rows, the count left out said in the notes.

        Parameters
        ----------
        rows : int or None
            Most rows to keep; None for all.
        """
        total = len(self.rows) if self.total is None else self.total
        if rows is None or (total <= rows and self.stream is None):
            return self
        kept = self.rows[:rows]
        if self.stream is not None:
            kept = tuple(islice(self.stream(), rows))
        notes = self.notes
        if len(kept) < total:
            left = total - len(kept)
            note = f"The first {len(kept):,} of {total:,} rows are shown; {left:,} left out."
            notes = (*notes, note)
        return replace(self, rows=kept, notes=notes, total=None, stream=None)

    def every_row(self) -> Iterator[tuple[Any, ...]]:
        """Yield all rows, also those that are not held."""
        return iter(self.rows) if self.stream is None else self.stream()

    def with_stars(self) -> Table:
        """Return the table with stars in print and their legend in the notes."""
        marked = any(column.starred and "print" in column.within for column in self.columns)
        return replace(self, stars=marked, notes=(*self.notes, _LEGEND if marked else _NO_STARS))


def stars_of(value: Any, column: Column) -> str:
    """Return the stars of a p-value; none for medians and for what is no p-value of a test.

    Examples
    --------
    >>> p = Column("p", "p", starred=True)
    >>> stars_of(0.01, p), stars_of(0.051, p), stars_of(0.2, p), stars_of(Pooled(0.01), p)
    ('***', '*', '', '')
    """
    if not column.starred or missing(value) or isinstance(value, Pooled):
        return ""
    return next((signs for level, signs in _STARS if float(value) <= level), "")


def pooled(record: Mapping[Any, Any], *names: str) -> dict[Any, Any]:
    """Return a row's named numbers; medians where it stands for several positions."""
    if int(record["positions"]) <= 1:
        return {}
    found = {name: record[name] for name in names}
    return {name: v if missing(v) else Pooled(v) for name, v in found.items()}


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
    if kind == "fixed":
        return fixed(float(value), 3)
    if kind == "date":
        return period_text(value)
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value)
