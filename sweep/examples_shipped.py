"""The examples that come with the package: plans, their data and a notebook."""

from __future__ import annotations

import shutil
from importlib.resources import files
from pathlib import Path

from sweep.errors import Fault, InputFault
from sweep.plan.suggest import suggestion
from sweep.writing import may_replace, usable_folder

__all__ = ["EXAMPLES", "copy_example"]

# Example and its files: the plan, a round of referees that starts from it, the data, a notebook.
EXAMPLES = {
    "us_macro": ("us_macro.toml", "us_macro_referees.toml", "data/us_macro.csv"),
    "harbour": ("harbour.toml", "harbour_referees.toml", "data/harbour.csv", "harbour.ipynb"),
}


# Ending of a shipped file, and the kind of file that it may replace.
_KINDS = {".toml": "toml", ".csv": "csv", ".ipynb": "json"}


def examples_folder() -> Path:
    """Return the folder of the shipped examples.

    In an installed package it is ``sweep/examples``; in a source tree, ``configs``.
    """
    packaged = Path(str(files("sweep"))) / "examples"
    return packaged if packaged.is_dir() else Path(str(files("sweep"))).parent / "configs"


def copy_example(name: str, folder: Path, *, overwrite: bool = False) -> list[Path]:
    """Copy the files of an example into a folder; the plan is the first path returned.

    Raises
    ------
    InputFault
        If there is no such example, a file is there already (with ``overwrite`` one of another
        kind), or the folder cannot be written into.
    """
    if name not in EXAMPLES:
        raise InputFault(
            Fault("--example", f'no example is called "{name}"' + suggestion(name, EXAMPLES))
        )
    written = []
    pairs = [(file, folder / file) for file in EXAMPLES[name]]
    for _, target in pairs:
        if target.exists() and not overwrite:
            raise InputFault(
                Fault(str(target), "the file is there already",
                      "Choose another folder with --output, or give --overwrite.")
            )
    for source, target in pairs:
        usable_folder(target.parent)
        with (examples_folder() / source).open(encoding="utf-8") as file:
            header = file.readline().strip()
        may_replace(target, _KINDS[target.suffix], header=header)
    for source, target in pairs:
        shutil.copyfile(examples_folder() / source, target)
        written.append(target)
    return written
