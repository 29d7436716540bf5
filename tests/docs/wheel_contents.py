"""Check what a built wheel holds: the packages, their data files, the examples, nothing else.

python tests/docs/wheel_contents.py WHEEL
"""

from __future__ import annotations

import sys
import zipfile
from pathlib import Path, PurePosixPath

ROOT = Path(__file__).resolve().parents[2]
DATA_FILES = ("*.sql", "*.j2", "*.css", "*.js", "py.typed")


def wanted() -> set[str]:
    """Return every file that the wheel must hold, by its name in the wheel."""
    names = {
        path.relative_to(ROOT).as_posix()
        for package in ("sweep", "store")
        for kind in ("*.py", *DATA_FILES)
        for path in (ROOT / package).rglob(kind)
    }
    for kind in ("*.toml", "*.ipynb", "data/*"):
        for path in (ROOT / "configs").glob(kind):
            if path.is_file():
                names.add(f"sweep/examples/{path.relative_to(ROOT / 'configs').as_posix()}")
    return names


def faults(held: set[str]) -> list[str]:
    """Say what is missing from a wheel's list of names, and what should not be there."""
    told = [f"missing: {name}" for name in sorted(wanted() - held)]
    for name in sorted(held):
        path = PurePosixPath(name)
        home = path.parts[0] in ("sweep", "store") or path.parts[0].endswith(".dist-info")
        left_over = path.suffix in (".duckdb", ".wal", ".html", ".pyc")
        if not home or left_over or "tests" in path.parts:
            told.append(f"should not be there: {name}")
    return told


def main(wheel: str) -> int:
    """Print what is wrong with a wheel and return the exit code."""
    with zipfile.ZipFile(wheel) as archive:
        held = set(archive.namelist())
    told = faults(held)
    print("\n".join(told) or f"{len(held)} files, all of them wanted, none missing")
    return 1 if told else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
