"""Writing files that a user asked for, whole or not at all."""

from __future__ import annotations

from pathlib import Path

from sweep.errors import Fault, InputFault

__all__ = ["write_new"]


def write_new(path: Path, text: str, *, overwrite: bool = False) -> None:
    """Write a text file.

    Raises
    ------
    InputFault
        If the file exists and must not be overwritten, or cannot be written.
    """
    if path.exists() and not overwrite:
        raise InputFault(
            Fault(str(path), "the file is there already",
                  "Name another with --output, or give --overwrite.")
        )
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as error:
        raise InputFault(
            Fault(str(path), f"the file cannot be written ({error.strerror})")
        ) from None
