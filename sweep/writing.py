"""Writing files that a user asked for: whole or not at all, and over nothing else's.

Whatever writes a file goes through :func:`may_replace` first: a file that is there already is
replaced only where it is of the kind that is written, and never where it is one that the
results come from.
"""

from __future__ import annotations

import json
import os
import tomllib
from collections.abc import Iterable, Mapping
from pathlib import Path

from sweep.errors import Fault, InputFault

__all__ = ["KINDS", "may_replace", "usable_folder", "write_new", "write_together", "write_whole"]

# What is written, by the ending that such files have, in words.
KINDS = {
    "html": "an HTML page", "json": "a JSON file", "toml": "a TOML file", "svg": "an SVG picture",
    "pdf": "a PDF", "png": "a PNG picture", "parquet": "a Parquet file", "csv": "such a CSV file",
    "tex": "a LaTeX file", "md": "a Markdown file", "txt": "a text file",
}  # fmt: skip
_MARKS = {"pdf": b"%PDF", "png": b"\x89PNG", "parquet": b"PAR1"}
# Columns by which a CSV file of results is told from data of the user's.
OWN_COLUMNS = frozenset({
    "admissible", "baseline_survives", "choice", "claim", "is_baseline", "p_value", "ruled",
    "specification", "survived", "verdict", "window_start",
})  # fmt: skip
_HEAD = 4096
"""Bytes by which most kinds are told."""
ELSEWHERE = "Give another path, or move that file away."


def may_replace(
    path: Path, kind: str, *, own: Iterable[Path] = (), header: str = ""
) -> None:
    """Refuse to write a file where that would destroy another one.

    Parameters
    ----------
    path : Path
        File to be written.
    kind : str
        One of ``KINDS``.
    own : iterable of Path
        Files that the results come from: store, plan, data.
    header : str
        First line of a CSV file, by which an older one of the same kind is known; any that has
        one of ``OWN_COLUMNS`` is, too.

    Raises
    ------
    InputFault
        If the path is a folder, one of ``own``, or a file that is not of this kind.
    """
    if path.is_dir():
        raise InputFault(Fault(str(path), "a folder is no file to write", "Name a file."))
    if not path.exists():
        return
    if any(other.exists() and path.samefile(other) for other in own):
        problem = "these results come from this file, so it is not written over"
        raise InputFault(Fault(str(path), problem, "Give another path."))
    if not path.is_file():
        return  # a device or a pipe has nothing to lose
    if not _is(path, kind, header):
        problem = f"the file that is there is not {KINDS[kind]}, so it is not written over"
        raise InputFault(Fault(str(path), problem, ELSEWHERE))


def write_whole(
    path: Path, text: str, kind: str, *, own: Iterable[Path] = (), header: str = ""
) -> Path:
    """Write a text file, which replaces an older one of its kind when it is complete.

    Parameters and errors are those of :func:`may_replace`; a file that cannot be written is an
    InputFault, too.
    """
    may_replace(path, kind, own=own, header=header)
    if path.exists() and not path.is_file():
        return _written(path, path, text)
    return _written(path, path.with_name(path.name + ".part"), text)


def write_new(path: Path, text: str, kind: str, *, overwrite: bool = False) -> Path:
    """Write a text file where there is none, or with ``overwrite`` over one of its kind.

    Raises
    ------
    InputFault
        If there is a file already and it may not be replaced, or it cannot be written.
    """
    if path.is_file() and not overwrite:
        raise InputFault(
            Fault(str(path), "the file is there already",
                  "Name another with --output, or give --overwrite.")
        )  # fmt: skip
    return write_whole(path, text, kind)


def write_together(contents: Mapping[Path, bytes], *, own: Iterable[Path] = ()) -> list[Path]:
    """Write several files, each of which replaces an older one of its kind; all or none.

    Parameters
    ----------
    contents : mapping of Path to bytes
        What goes into each file; its ending says of which kind it is.
    own : iterable of Path
        Files that the results come from.

    Returns
    -------
    list of Path
        The files, in the same order.

    Raises
    ------
    InputFault
        If one of them cannot be written or may not be replaced; then the others are not there
        either, unless they were before.
    """
    own = tuple(own)
    for path, content in contents.items():
        header = content.split(b"\n", 1)[0].decode("utf-8", errors="replace").strip()
        may_replace(path, path.suffix.lower().removeprefix("."), own=own, header=header)
    parts: dict[Path, Path] = {}
    path = Path()
    try:
        for path, content in contents.items():
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


def usable_folder(folder: Path) -> Path:
    """Make a folder where there is none; refuse one that cannot be written into.

    Raises
    ------
    InputFault
        If it is a file, or may not be made or written into.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except FileExistsError:
        raise InputFault(Fault(str(folder), "this is a file", "Name a folder.")) from None
    except OSError as error:
        problem = f"the folder cannot be made ({error.strerror})"
        raise InputFault(Fault(str(folder), problem, "Give another folder.")) from None
    if not os.access(folder, os.W_OK | os.X_OK):
        problem = "nothing may be written into this folder"
        raise InputFault(Fault(str(folder), problem, "Give another folder."))
    return folder


def _written(path: Path, part: Path, text: str) -> Path:
    try:
        part.write_text(text, encoding="utf-8")
        if part != path:
            part.replace(path)
    except OSError as error:
        if part != path:
            part.unlink(missing_ok=True)
        problem = f"the file cannot be written ({error.strerror})"
        raise InputFault(Fault(str(path), problem, "Give another path.")) from None
    return path


def _is(path: Path, kind: str, header: str) -> bool:
    """Say whether a file looks like one of a kind; an empty one is everything's."""
    try:
        with path.open("rb") as file:
            content = file.read() if kind in ("json", "toml") else file.read(_HEAD)
    except OSError as error:
        problem = f"the file that is there cannot be read ({error.strerror})"
        raise InputFault(Fault(str(path), problem, ELSEWHERE)) from None
    if not content:
        return True
    if kind in _MARKS:
        return content.startswith(_MARKS[kind])
    if b"\0" in content:
        return False
    text = content.decode("utf-8-sig", errors="replace")
    start = text.lstrip().lower()
    if kind == "html":
        return start.startswith(("<!doctype html", "<html"))
    if kind == "svg":
        return start.startswith(("<svg", "<?xml")) and "<svg" in start
    if kind == "csv":
        first = text.splitlines()[0].strip()
        return first == header or not OWN_COLUMNS.isdisjoint(first.split(","))
    if kind == "json":
        return _parses(text, kind)
    # A plan that somebody broke off writing may be replaced, too; that is asked for in words.
    return (kind == "toml" and _parses(text, kind)) or path.suffix.lower() == f".{kind}"


def _parses(text: str, kind: str) -> bool:
    try:
        json.loads(text) if kind == "json" else tomllib.loads(text)
    except ValueError:
        return False
    return True
