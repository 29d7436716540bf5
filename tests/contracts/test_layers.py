"""Who may import whom, and what nothing outside the tests may be called."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
FILES = sorted([*ROOT.glob("sweep/**/*.py"), *ROOT.glob("store/**/*.py")])
FILES = [path for path in FILES if "examples" not in path.parts]
# Lower layers first; a module may import its own layer and those before it.
LAYERS = (
    "kernels", "panel", "plan", "procedures", "screens", "engine", "verdicts", "charts", "report",
    "results", "api", "cli",
)  # fmt: skip
PURE = ("verdicts", "charts", "report")
# Explaining a stored row starts from results; it is typed against them and imports nothing else.
ALLOWED = {("engine", "results")}


def imported(path: Path, *, at_run_time: bool = False) -> Iterator[str]:
    """Yield the modules that a file imports; those for type checkers only if asked for."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    package = ".".join(path.relative_to(ROOT).parent.parts)
    skipped = set()
    if at_run_time:
        for node in ast.walk(tree):
            if isinstance(node, ast.If) and "TYPE_CHECKING" in ast.dump(node.test):
                skipped |= {id(inner) for inner in ast.walk(node)}
    for node in ast.walk(tree):
        if id(node) in skipped:
            continue
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            base = package.split(".")[: len(package.split(".")) - node.level + 1]
            module = ".".join([*base, node.module or ""]) if node.level else node.module or ""
            yield module.rstrip(".")


def layer(module: str) -> str:
    parts = module.split(".")
    return parts[1] if parts[0] == "sweep" and len(parts) > 1 else ""


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(ROOT)))
def test_imports_go_down(path: Path) -> None:
    own = path.relative_to(ROOT).with_suffix("").parts
    mine = own[1] if own[0] == "sweep" and len(own) > 1 else own[0]
    for module in imported(path, at_run_time=True):
        top = module.split(".")[0]
        if own[0] == "store":
            assert top != "sweep", f"store imports {module}"
        if top == "duckdb":
            assert own in (("store", "database"), ("sweep", "panel", "binaryfiles")), module
        if mine == "kernels":
            assert top in {"numpy", "scipy", "__future__"} or module.startswith(
                ("sweep.kernels", "collections", "dataclasses", "enum", "typing")
            ), module
        if mine in PURE:
            assert top != "store", f"{path.name} imports {module}; it takes frames"
        target = layer(module)
        if mine in LAYERS and target in LAYERS and (mine, target) not in ALLOWED:
            assert LAYERS.index(target) <= LAYERS.index(mine), f"{mine} imports {module}"


@pytest.mark.parametrize("path", FILES, ids=lambda p: str(p.relative_to(ROOT)))
def test_nothing_outside_the_tests_is_named_test(path: Path) -> None:
    assert "test" not in path.stem.split("_")
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.FunctionDef | ast.ClassDef):
            assert not node.name.lower().startswith("test"), node.name


def test_checking_a_plan_imports_nothing_heavy() -> None:
    code = (
        "import sys; import sweep.cli; import sweep.api; from sweep.engine.check import check_plan;"
        "check_plan(sweep.api.load_plan('configs/us_macro.toml'));"
        "heavy = {'duckdb','pandas','altair','statsmodels','scipy.stats','joblib'};"
        "print(sorted(heavy & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"


def test_help_imports_neither_numbers_nor_plans() -> None:
    code = (
        "import sys, click; from sweep.cli import group; group.get_help(click.Context(group));"
        "print(sorted({'numpy','pydantic','rich','pandas'} & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"
