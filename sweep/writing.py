"""Writing files that a user asked for, whole or not at all."""

from __future__ import annotations

import errno
import os
from collections.abc import Mapping
from pathlib import Path

from sweep.errors import Fault, InputFault

__all__ = ["write_new", "write_together"]


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


def write_together(contents: Mapping[Path, bytes]) -> list[Path]:
    """Write several files, each of which replaces an older one; all of them or none.

    Parameters
    ----------
    contents : mapping of Path to bytes
        What goes into each file.

    Returns
    -------
    list of Path
        The files, in the same order.

    Raises
    ------
    InputFault
        If one of them cannot be written; then the others are not there either, unless they
        were before.
    """
    parts: dict[Path, Path] = {}
    path = Path()
    try:
        for path, content in contents.items():
            if path.is_dir():
                raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
            part = path.with_name(path.name + ".part")
            part.touch()
            parts[path] = part
            part.write_bytes(content)
        for path, part in parts.items():
            part.replace(path)
    except OSError as error:
        message = f"the file cannot be written ({error.strerror})"
        raise InputFault(Fault(str(path), message, "Give another path with --output.")) from None
    finally:
        for part in parts.values():
            part.unlink(missing_ok=True)
    return list(contents)
