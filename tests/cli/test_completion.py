"""Shell completion: commands, options, choices, and the files that an argument is meant for."""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from sweep.cli import COMMANDS, main

CODE = "import sys; from sweep.cli import main; main(sys.argv[1:])"


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    for name in ("a.toml", "b.toml", "a.duckdb", "a.csv", "notes.txt"):
        (tmp_path / name).touch()
    (tmp_path / "deeper").mkdir()
    (tmp_path / "deeper" / "c.duckdb").touch()
    return tmp_path


def offered(folder: Path, *words: str, shell: str = "zsh") -> list[str]:
    """Return what a shell is told for the last word: value or kind, one line each."""
    environment = {
        "PYTHONPATH": str(Path(__file__).parents[2]), "_CROSSWIND_COMPLETE": f"{shell}_complete",
        "COMP_WORDS": " ".join(["crosswind", *words]), "COMP_CWORD": str(len(words)),
    }  # fmt: skip
    done = subprocess.run(
        [sys.executable, "-c", CODE], env=environment, cwd=folder, capture_output=True,
        text=True, check=True,
    )  # fmt: skip
    assert not done.stderr
    # zsh is told three lines for each: kind, value, help.
    lines = done.stdout.strip("\n").splitlines()
    return [
        value if kind == "plain" else f"<{kind}>"
        for kind, value in zip(lines[::3], lines[1::3], strict=True)
    ]


def test_commands(folder: Path) -> None:
    assert offered(folder, "") == list(COMMANDS)
    assert offered(folder, "ex") == [name for name in COMMANDS if name.startswith("ex")]
    assert "--version" in offered(folder, "--")


def test_options_and_choices(folder: Path) -> None:
    assert set(offered(folder, "verify", "a.duckdb", "--t")) == {"--tolerance"}
    assert offered(folder, "query", "a.duckdb", "SELECT", "--format", "") == [
        "table", "csv", "json",
    ]  # fmt: skip
    assert offered(folder, "completion", "") == ["bash", "zsh", "fish"]


@pytest.mark.parametrize(
    ("words", "files"),
    [
        (("run", ""), ["a.toml", "b.toml"]),
        (("run", "b"), ["b.toml"]),
        (("check", "a.toml", "--jobs", "2", ""), []),
        (("show", ""), ["a.duckdb"]),
        (("show", "deeper/"), ["deeper/c.duckdb"]),
        (("show", "dee"), ["<file>"]),
        (("show", "none/x"), ["<file>"]),
        (("new", ""), ["a.csv"]),
        (("verify", "a.duckdb", "--data", ""), ["a.csv"]),
        (("run", "a.toml", "--store", ""), ["a.duckdb"]),
        (("report", "a.duckdb", "--output", ""), ["<file>"]),
    ],
)
def test_files(folder: Path, words: tuple[str, ...], files: list[str]) -> None:
    assert offered(folder, *words) == files


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_scripts_name_the_program(shell: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as left:
        main(["completion", shell])
    assert not left.value.code
    text = capsys.readouterr().out
    assert f"_CROSSWIND_COMPLETE={shell}_complete" in text
    with pytest.raises(SystemExit) as left:
        main(["completion", "tcsh"])
    assert left.value.code == 2


@pytest.mark.skipif(shutil.which("bash") is None, reason="there is no bash")
def test_bash_completes_with_the_script(folder: Path) -> None:
    """The script is read by a bash that then completes two words, as the key Tab does."""
    program = folder / "bin" / "crosswind"
    program.parent.mkdir()
    program.write_text(f'#!/bin/sh\nexec "{sys.executable}" -c "{CODE}" "$@"\n', encoding="utf-8")
    program.chmod(0o755)
    script = (
        'eval "$(crosswind completion bash)"\n'
        "complete -p crosswind\n"
        'COMP_WORDS=(crosswind ver); COMP_CWORD=1; _crosswind_completion crosswind\n'
        'echo "${COMPREPLY[@]}"\n'
        'COMPREPLY=(); COMP_WORDS=(crosswind run ""); COMP_CWORD=2\n'
        "_crosswind_completion crosswind\n"
        'echo "${COMPREPLY[@]}"\n'
    )
    environment = {
        "PATH": f"{program.parent}:/usr/local/bin:/usr/bin:/bin",
        "PYTHONPATH": str(Path(__file__).parents[2]),
    }
    done = subprocess.run(
        ["bash", "--noprofile", "--norc", "-c", script], env=environment, cwd=folder,
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    registered, commands, files = done.stdout.splitlines()
    assert "_crosswind_completion crosswind" in registered
    assert commands == "verify"
    assert files == "a.toml b.toml"
    assert not done.stderr
