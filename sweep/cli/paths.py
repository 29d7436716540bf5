"""Paths on the command line, and which files a shell offers for them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click
from click.shell_completion import CompletionItem

__all__ = ["DATA", "FOLDER", "OUTPUT", "PLAN", "STORE", "FileWithEnding", "NamedPath"]


class NamedPath(click.Path):
    """A path that is not empty: an empty one would mean the folder one is in."""

    def __init__(self, **options: Any) -> None:
        super().__init__(path_type=Path, **options)

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> Any:
        """Refuse an empty text, otherwise convert as usual."""
        if value == "":
            self.fail("the name is empty", param, ctx)
        return super().convert(value, param, ctx)


class FileWithEnding(NamedPath):
    """A path whose completion offers the files that it is meant for.

    Parameters
    ----------
    endings : str
        Such as ``.toml``.  Other files are accepted as well; they are only not offered as long
        as there is one with such an ending.
    """

    def __init__(self, *endings: str) -> None:
        super().__init__()
        self.endings = endings

    def shell_complete(
        self, ctx: click.Context, param: click.Parameter, incomplete: str
    ) -> list[CompletionItem]:
        """Return the files that fit; where there is none, leave it to the shell."""
        typed, start = incomplete.rpartition("/")[::2]
        folder = Path(f"{typed}/") if "/" in incomplete else Path()
        try:
            names = sorted(entry.name for entry in folder.iterdir() if entry.is_file())
        except OSError:
            names = []
        before = f"{typed}/" if "/" in incomplete else ""
        fitting = [
            CompletionItem(before + name)
            for name in names
            if name.startswith(start) and name.lower().endswith(self.endings)
        ]
        return fitting or [CompletionItem(incomplete, type="file")]


PLAN = FileWithEnding(".toml")
STORE = FileWithEnding(".duckdb")
DATA = FileWithEnding(".csv", ".parquet", ".xlsx")
OUTPUT = NamedPath()
FOLDER = NamedPath(file_okay=False)
