"""Tables as files, whole or not at all."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.writing import may_replace

if TYPE_CHECKING:
    from .model import Table

__all__ = ["ENDINGS", "form_of", "save"]

# Ending of a file and how a table is written into it.
ENDINGS = {".tex": "latex", ".md": "markdown", ".csv": "csv", ".html": "html"}
_KINDS = {form: ending.removeprefix(".") for ending, form in ENDINGS.items()}


def form_of(path: Path) -> str:
    """Return how a table is written into a file, from the file's ending.

    Raises
    ------
    InputFault
        If the ending says nothing.
    """
    form = ENDINGS.get(path.suffix.lower())
    if form is None:
        known = ", ".join(ENDINGS)
        message = f"its ending does not say how to write the table (known: {known})"
        mend = "Say it with --format, or give another ending."
        raise InputFault(Fault(str(path), message + suggestion(path.suffix, ENDINGS), mend))
    return form


def save(table: Table, path: Path, form: str | None = None) -> Path:
    """Write a table to a file, which appears only when it is complete.

    Parameters
    ----------
    table : Table
    path : Path
        A file of the same kind that is there already is replaced.
    form : str or None
        ``latex``, ``markdown``, ``csv`` or ``html``; None for what the ending says.

    Raises
    ------
    InputFault
        If the ending says nothing, the file cannot be written, or there is one of another kind.
    """
    form = form or form_of(path)
    header = next(iter(table.parts(form)), "").split("\n", 1)[0].strip()
    may_replace(path, _KINDS[form], header=header)
    partial = path.with_name(path.name + ".part")
    try:
        with partial.open("w", encoding="utf-8", newline="") as file:
            for part in table.parts(form):
                file.write(part)
        partial.replace(path)
    except OSError as error:
        partial.unlink(missing_ok=True)
        message = f"the table cannot be written ({error.strerror})"
        raise InputFault(Fault(str(path), message, "Give another path.")) from None
    except BaseException:
        partial.unlink(missing_ok=True)
        raise
    return path
