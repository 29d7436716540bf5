"""Plans that start from another plan: one document out of a chain of files."""

from __future__ import annotations

import os
import tomllib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from sweep.errors import Fault, InputFault
from sweep.plan.printed import WrittenFloat
from sweep.plan.suggest import suggestion

__all__ = ["Written", "read_text", "resolve"]

# Lists that an extending plan adds to instead of replacing.
APPENDED = ("requests",)


@dataclass(frozen=True, slots=True)
class Written:
    """What a plan file says, with what it starts from put in.

    Attributes
    ----------
    content : dict
        Plain TOML values; ``extends`` is gone.
    files : tuple of Path
        The file itself, then the one that it extends, and so on to the first.
    replaced : tuple of str
        Keys of earlier files that a later one says anew, as they would be pointed at.
    """

    content: dict[str, Any]
    files: tuple[Path, ...]
    replaced: tuple[str, ...] = ()


def read_text(path: Path) -> str:
    """Return the text of a plan file.

    Raises
    ------
    InputFault
        If it cannot be read or is not UTF-8.
    """
    try:
        return path.read_text(encoding="utf-8")
    except FileNotFoundError:
        raise InputFault(_no_file(path)) from None
    except IsADirectoryError:
        raise InputFault(Fault(str(path), "this is a folder, not a plan file")) from None
    except UnicodeDecodeError:
        mend = "Save it as UTF-8 text."
        raise InputFault(Fault(str(path), "the plan file is not UTF-8 text", mend)) from None
    except OSError as error:
        reason = error.strerror or "unknown reason"
        raise InputFault(Fault(str(path), f"the plan file cannot be read ({reason})")) from None


def resolve(text: str, path: Path, later: tuple[Path, ...] = ()) -> Written:
    """Parse a plan file and put what it extends under it.

    Tables are merged key by key, lists and values of the later file replace the earlier
    ones, and requests are added to the earlier ones.  The path of the data file stays
    relative to the file that names it.

    Parameters
    ----------
    text : str
        Text of the file.
    path : Path
        Where it stands.
    later : tuple of Path
        Files that lead here, to notice a circle.

    Raises
    ------
    InputFault
        If a file is not valid TOML, cannot be read, or the files extend each other in a
        circle.
    """
    try:
        # Floats keep their text: a printed 0.020 is good to other digits than a printed 0.02.
        content = tomllib.loads(text, parse_float=WrittenFloat)
    except tomllib.TOMLDecodeError as error:
        mend = "Check quotes, brackets and commas there."
        raise InputFault(Fault(path.name, f"not valid TOML: {error}", mend)) from None
    extended = content.pop("extends", None)
    if extended is None:
        return Written(content, (path,))
    if not isinstance(extended, str):
        raise InputFault(Fault("extends", "the name of a plan file in quotes is needed here"))
    source = path.parent / extended
    if source.resolve() in {p.resolve() for p in (path, *later)}:
        raise InputFault(
            Fault("extends", f'"{extended}" leads back to a plan that extends it',
                  "Let one of the files stand on its own.")
        )  # fmt: skip
    try:
        earlier_text = read_text(source)
    except InputFault as fault:
        found = [Fault("extends", f"{one.place}: {one.problem}", one.mend) for one in fault.faults]
        raise InputFault(*found) from None
    earlier = resolve(earlier_text, source, (*later, path))
    base = _moved(earlier.content, source.parent, path.parent)
    replaced: list[str] = []
    merged = _merge(base, content, "", replaced)
    # A key that an earlier link replaced is said once.
    every = tuple(dict.fromkeys((*earlier.replaced, *replaced)))
    return Written(merged, (path, *earlier.files), every)


def _moved(content: dict[str, Any], source: Path, target: Path) -> dict[str, Any]:
    """Write the data file's relative path as seen from another folder."""
    data = content.get("data")
    if not isinstance(data, dict) or not isinstance(data.get("file"), str):
        return content
    file = Path(data["file"])
    if not file.is_absolute() and source.resolve() != target.resolve():
        file = Path(os.path.relpath((source / file).resolve(), target.resolve()))
    return content | {"data": data | {"file": file.as_posix()}}


def _merge(
    base: dict[str, Any], over: dict[str, Any], place: str, replaced: list[str]
) -> dict[str, Any]:
    merged = dict(base)
    for key, value in over.items():
        here = f"{place}.{key}" if place else key
        if key not in base:
            merged[key] = value
        elif isinstance(base[key], dict) and isinstance(value, dict) and not _is_choice(here):
            merged[key] = _merge(base[key], value, here, replaced)
        elif here in APPENDED and isinstance(base[key], list) and isinstance(value, list):
            merged[key] = [*base[key], *value]
        else:
            if base[key] != value:
                replaced.append(here)
            merged[key] = value
    return merged


def _is_choice(place: str) -> bool:
    """Say whether a table is one choice, which is replaced whole."""
    return place.startswith("baseline.") and place != "baseline.reported"


def _no_file(path: Path) -> Fault:
    near = [p.name for p in path.parent.glob("*.toml")] if path.parent.is_dir() else []
    mend = suggestion(path.name, near).removeprefix("; ")
    mend = mend[:1].upper() + mend[1:] if mend else 'Write one with "crosswind new DATA".'
    return Fault(str(path), "there is no such plan file", mend)
