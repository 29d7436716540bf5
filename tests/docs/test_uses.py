"""The three uses of the README, run as they stand, on the example they name and on the other."""

from __future__ import annotations

import re
import shlex
import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner

from sweep.cli import group

pytestmark = pytest.mark.slow

ROOT = Path(__file__).resolve().parents[2]
OTHER = {"us_macro": "harbour", "unemployment leads inflation": "freight leads rents"}
# The invented example has no printed numbers to reproduce.
NOT_THERE = " --require reproduced"


def blocks() -> list[list[str]]:
    """Return the commands of each use, in order."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    section = text.split("## Three uses\n", 1)[1].split("\n## ", 1)[0]
    found = re.findall(r"```sh\n(.*?)```", section, flags=re.S)
    assert len(found) == 3
    return [block.strip().splitlines() for block in found]


def for_the_other(line: str) -> str:
    """Return a command as a user of the other example would type it."""
    for name, other in OTHER.items():
        line = line.replace(name, other)
    return line.replace(NOT_THERE, "")


@pytest.mark.parametrize("example", ["us_macro", "harbour"])
def test_every_command_of_the_uses(
    example: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    shutil.copytree(
        ROOT / "configs", tmp_path / "configs",
        ignore=shutil.ignore_patterns("*.duckdb", "*.html", "*.wal"),
    )  # fmt: skip
    monkeypatch.chdir(tmp_path)
    runner = CliRunner()
    for line in (line for block in blocks() for line in block):
        command = line if example == "us_macro" else for_the_other(line)
        program, *arguments = shlex.split(command)
        assert program == ".venv/bin/crosswind"
        done = runner.invoke(group, arguments)
        assert done.exit_code == 0, (command, done.output, done.exception)
        if "--output" in arguments:
            written = Path(arguments[arguments.index("--output") + 1])
            assert len(written.read_bytes().splitlines()) > 1, command
        else:
            assert len(done.stdout.splitlines()) > 3, command
    assert (tmp_path / "configs" / f"{example}.html").exists()
    assert (tmp_path / "configs" / f"{example}_referees.html").exists()
    tables = (tmp_path / "requests.tex").read_text(encoding="utf-8")
    assert "Referee 1, comment" in tables
