"""README.md says what the code says: generated parts, commands, the plan, links."""

from __future__ import annotations

import ast
import os
import re
import shlex
import shutil
import tomllib
from pathlib import Path
from typing import get_args

import click
import pytest
import regenerate
import wheel_contents

import sweep
from sweep.cli import COMMANDS, group
from sweep.errors import CrosswindError
from sweep.panel.periods import FREQUENCIES
from sweep.plan import tables
from sweep.plan.load import plan_from_text
from sweep.procedures import PROCEDURES
from sweep.report.tables import TABLES
from sweep.results import Results
from sweep.screens import SCREENS

ROOT = regenerate.ROOT
TEXT = regenerate.README.read_text(encoding="utf-8")
BLOCKS = re.findall(r"^```(\w+)\n(.*?)^```", TEXT, flags=re.DOTALL | re.MULTILINE)
LINES = [line for kind, body in BLOCKS if kind == "sh" for line in body.splitlines()]
OPTIONS = {"terminal_width": regenerate.WIDTH, "max_content_width": regenerate.WIDTH}


def blocks(kind: str) -> list[str]:
    return [body for name, body in BLOCKS if name == kind]


def steps(line: str) -> list[list[str]]:
    """Split a command line at ``&&`` into words."""
    return [shlex.split(step) for step in line.split("&&")]


@pytest.mark.parametrize("name", regenerate.QUICK)
def test_generated_part_is_current(name: str) -> None:
    made = regenerate.QUICK[name]()
    assert regenerate.part(name, TEXT) == made, "run: python tests/docs/regenerate.py"


@pytest.mark.slow
@pytest.mark.parametrize("name", regenerate.SLOW)
def test_generated_result_is_current(name: str) -> None:
    made = regenerate.SLOW[name]()
    assert regenerate.part(name, TEXT) == made, "run: python tests/docs/regenerate.py"


def test_missing_markers_are_told() -> None:
    with pytest.raises(ValueError, match="0 parts"):
        regenerate.part("commands", "nothing")


@pytest.mark.parametrize("line", LINES)
def test_command_line_parses(line: str) -> None:
    found = 0
    for words in steps(line):
        if Path(words[0]).name == "crosswind":
            found += 1
            command = group.get_command(click.Context(group), words[1])
            assert command is not None, words
            command.make_context(words[1], words[2:])
        elif Path(words[0]).name == "pytest":
            found += 1
            assert words[1] == "-m"
    assert found, "a command line that no check understands"


@pytest.mark.parametrize("words", re.findall(r"`(?:\S*/)?crosswind ([^`]+)`", TEXT))
def test_command_in_a_sentence_exists(words: str) -> None:
    name, *arguments = shlex.split(words)
    assert name in COMMANDS
    command = group.get_command(click.Context(group), name)
    assert command is not None
    known = {option for parameter in command.params for option in parameter.opts}
    assert {word for word in arguments if word.startswith("--")} <= known


def test_first_screen_has_both_commands() -> None:
    """.ci/run takes the two lines from here, so each is alone on its line."""
    first = TEXT[: TEXT.index("\n## ")]
    run_line = r"^python3 -m venv \.venv &&.* run configs/us_macro\.toml$"
    assert len(re.findall(run_line, first, re.M)) == 1
    assert len(re.findall(r"^python3 -m venv \.venv-test &&.*pytest -m .*$", first, re.M)) == 1
    assert "python3-venv" in first
    assert "3.11" in first


def test_version_of_python_is_the_one_required() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["requires-python"] == ">=3.11"
    named = set(re.findall(r"pip install (?:-e )?'\.\[(\w+)\]'", TEXT))
    assert named
    assert named <= set(project["optional-dependencies"])


def test_markers_are_declared(pytestconfig: pytest.Config) -> None:
    declared = {line.split(":")[0] for line in pytestconfig.getini("markers")}
    used = set(re.findall(r"-m (\w+)$", "\n".join(LINES), re.M)) | {"slow", "bench"}
    assert used <= declared


def test_plan_runs_on_the_shipped_data(tmp_path: Path) -> None:
    # The block on requests starts from a shipped plan; tests/docs/test_uses.py runs that one.
    (text,) = (block for block in blocks("toml") if "extends" not in block)
    shutil.copytree(ROOT / "configs" / "data", tmp_path / "data")
    checked = sweep.check(plan_from_text(text, tmp_path / "example.toml"))
    assert checked.planned > 10_000
    assert checked.ruled_out
    for axis in ("lags", "deterministics", "window", "transformation", "test", "conditioning"):
        assert any(size.axis == axis and len(size.choices) > 1 for size in checked.axes), axis


def test_python_parses_and_names_exist() -> None:
    for body in blocks("python"):
        tree = ast.parse(body)
        for node in ast.walk(tree):
            if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name):
                owner = {"sweep": sweep, "results": Results}.get(node.value.id)
                assert owner is None or hasattr(owner, node.attr), node.attr


@pytest.mark.slow
def test_python_runs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    shutil.copytree(
        ROOT / "configs", tmp_path / "configs", ignore=shutil.ignore_patterns("*.duckdb*", "*.html")
    )
    monkeypatch.chdir(tmp_path)
    for body in blocks("python"):
        exec(compile(body, "README.md", "exec"), {})
    assert (tmp_path / "survival.svg").stat().st_size > 1000
    assert (tmp_path / "report.html").stat().st_size > 100_000
    assert (tmp_path / "results" / "outcomes.parquet").exists()


@pytest.mark.parametrize(
    "name",
    [
        *get_args(tables.CRITERIA),
        *get_args(tables.TRENDS),
        *get_args(tables.TRANSFORMATIONS),
        *get_args(tables.STATISTICS),
        *get_args(tables.COVARIANCES),
        *FREQUENCIES,
        *PROCEDURES,
        *SCREENS,
        *TABLES,
    ],
)
def test_every_choice_is_named(name: str) -> None:
    assert name in TEXT


def test_criterion_maxima_are_those_of_the_code() -> None:
    sentence = re.search(r"Unless given: (.*?)\.", TEXT, re.DOTALL)
    assert sentence is not None
    told = re.findall(r"([a-z ]+?) (\d+)", sentence[1].replace("\n", " ").replace(",", ""))
    maxima = {name.strip(): int(number) for name, number in told}
    both = maxima.pop("daily and business daily")
    maxima |= {"daily": both, "business daily": both}
    assert maxima == {name: item.criterion_maximum for name, item in FREQUENCIES.items()}


def test_exit_codes_are_those_of_the_code() -> None:
    table = TEXT[TEXT.index("Exit codes:") : TEXT.index("## Python")]
    told = {int(code) for code in re.findall(r"^\| (\d+) \|", table, re.M)}
    from store.errors import StoreError

    kinds = [StoreError, *CrosswindError.__subclasses__()]
    assert {kind.exit_code for kind in kinds} <= told
    assert {0, 1, 3} <= told


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md"])
def test_relative_links_exist(name: str) -> None:
    text = (ROOT / name).read_text(encoding="utf-8")
    anchors = {
        re.sub(r"[^\w\- ]", "", heading.lower()).strip().replace(" ", "-")
        for heading in re.findall(r"^#+ (.*)$", text, re.M)
    }
    for target in re.findall(r"\]\(([^)]+)\)", text):
        if target.startswith("#"):
            assert target[1:] in anchors, target
        elif not target.startswith("http"):
            assert (ROOT / target.split("#")[0]).exists(), target


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md"])
def test_no_machine_paths(name: str) -> None:
    text = (ROOT / name).read_text(encoding="utf-8")
    assert not re.findall(r"(?<![\w.])/(?:home|work|tmp|root|Users)\b", text)


def test_ci_is_executable() -> None:
    assert os.access(ROOT / ".ci" / "run", os.X_OK)


def test_wheel_is_asked_to_hold_every_example() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    forced = project["tool"]["hatch"]["build"]["targets"]["wheel"]["force-include"]
    kinds = ("*.toml", "*.ipynb")
    held = {f"configs/{path.name}" for kind in kinds for path in (ROOT / "configs").glob(kind)}
    assert held | {"configs/data"} == set(forced)


def test_wheel_faults_are_found() -> None:
    held = wheel_contents.wanted()
    assert wheel_contents.faults(held) == []
    left_over = held | {"sweep/examples/us_macro.duckdb", "tests/conftest.py"}
    assert len(wheel_contents.faults(left_over)) == 2
    assert wheel_contents.faults(held - {"store/schema.sql"}) == ["missing: store/schema.sql"]
