"""Every fault as a user meets it: the whole message, exit code 2 or 5, and nothing written."""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import duckdb
import pandas as pd
import pytest
import small_plans
from data_faults import FAULTS, GOOD

import sweep
from store.schema import SCHEMA_VERSION
from sweep.cli import main

# What a plan says before the data are looked at.
OF_THE_PLAN = {
    "unknown frequency": 'data.frequency: "montly" is not known here; did you mean "monthly"?',
}
PLAN = """
title = "A plan for a bad file"
[data]
file = "{file}"
date = "{date}"
frequency = "{frequency}"
calendar = "{rule}"
[[findings]]
name = "one leads the other"
cause = "{columns[0]}"
effect = "{columns[1]}"
[baseline]
lags = 1
transformation = "level"
"""
USUAL = {
    "columns": ["rents", "freight"], "date": "month", "frequency": "monthly",
    "rule": "every period", "file": "harbour.csv",
}  # fmt: skip


def said(capsys: pytest.CaptureFixture[str], *arguments: object) -> tuple[int, str]:
    """Run a command; return its exit code and what it wrote to standard error."""
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    shown = capsys.readouterr()
    assert not shown.out
    assert "Traceback" not in shown.err
    return int(left.value.code or 0), shown.err


def content_of(folder: Path) -> dict[str, bytes]:
    return {p.name: p.read_bytes() for p in sorted(folder.iterdir()) if p.is_file()}


def write_plan(folder: Path, **asked: Any) -> Path:
    plan = folder / "plan.toml"
    plan.write_text(PLAN.format(**USUAL | asked), encoding="utf-8")
    return plan


def refused(
    capsys: pytest.CaptureFixture[str], plan: Path, message: str, commands: tuple[str, ...]
) -> None:
    """Say what each command leaves with, and that nothing in the plan's folder changes."""
    before = content_of(plan.parent)
    for command in commands:
        assert said(capsys, command, plan) == (2, f"{message}\n")
        assert content_of(plan.parent) == before


# -- the data file -------------------------------------------------------------------------


@pytest.mark.parametrize("name", FAULTS)
def test_a_bad_file(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    content, asked, message = FAULTS[name]
    path = tmp_path / "harbour.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    message = OF_THE_PLAN.get(name, message).format(path=path, name=path.name)
    refused(capsys, write_plan(tmp_path, **asked), message, ("check", "run"))


@pytest.mark.parametrize(
    ("file", "message"),
    [
        (
            "absent.csv",
            "{path}: there is no such file. Check the name and the folder; a plan's data are "
            "looked for from the plan's folder.\n",
        ),
        (".", "{path}: this is a folder, not a data file.\n"),
        (
            "data.xls",
            "{path}: files ending in “.xls” cannot be read. Save the data as .csv, .parquet or "
            ".xlsx.\n",
        ),
        (
            "data.dta",
            "{path}: files ending in “.dta” cannot be read. Save the data as .csv, .parquet or "
            ".xlsx.\n",
        ),
        # What follows in brackets is the reader's own reason, in words that change with it.
        ("data.parquet", "{path}: the file cannot be read as Parquet ("),
        ("data.xlsx", "{path}: the file cannot be read as Excel ("),
    ],
)
def test_a_file_that_is_no_table(
    file: str, message: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    if file.startswith("data"):
        (tmp_path / file).write_text(GOOD, encoding="utf-8")
    plan = write_plan(tmp_path, file=file)
    before = content_of(tmp_path)
    for command in ("check", "run"):
        code, words = said(capsys, command, plan)
        start = message.format(path=tmp_path / file)
        assert (code, words[: len(start)]) == (2, start)
        assert words.count("\n") == 1
        assert words == start or words.endswith(").\n")
        assert content_of(tmp_path) == before


# -- the series in it ----------------------------------------------------------------------


def _constant(frame: pd.DataFrame) -> None:
    frame["z"] = 5.0


def _twin(frame: pd.DataFrame) -> None:
    frame["z"] = 2 * frame["x"] + 1


def _combination(frame: pd.DataFrame) -> None:
    frame["z"] = frame["x"] - 3 * frame["y"]


def _hole(frame: pd.DataFrame) -> None:
    frame.loc[30, "z"] = None


def _holes(frame: pd.DataFrame) -> None:
    frame.loc[[30, 31, 90], "y"] = None


def _empty(frame: pd.DataFrame) -> None:
    frame["z"] = None


def _apart(frame: pd.DataFrame) -> None:
    frame.loc[:79, "x"], frame.loc[80:, "y"] = None, None


def _negative(frame: pd.DataFrame) -> None:
    frame.loc[38, "x"], frame.loc[39, "x"] = -1.5, 0.0


NOT_POSITIVE = (
    "small.csv, line 40, column x: 2 values are zero or negative, so no log exists: 1993-03, "
    "1993-04. Give this series another transformation, such as “difference” or “inverse "
    "hyperbolic sine”."
)
FILL = (
    "Fill it in the file, start or end the series there, or leave the episode out of every window "
    "with without = [first, last]."
)
# name: (what is done to the data, what the plan asks, the whole message)
SERIES = {
    "constant": (
        _constant, "",
        "small.csv, column z: the series is constant: every value is 5. A series that never moves "
        "can neither lead nor follow; choose another.",
    ),
    "collinear with one": (
        _twin, "",
        "small.csv, column z: perfectly collinear with x. Leave one of these series out.",
    ),
    "collinear with two": (
        _combination, "",
        "small.csv, column z: perfectly collinear: a fixed combination of x, y. Leave one of these "
        "series out.",
    ),
    "missing inside": (
        _hole, "",
        f"small.csv, line 32, column z: a value is missing inside the sample: 1992-07. {FILL}",
    ),
    "missing inside, several": (
        _holes, "",
        "small.csv, line 32, column y: 3 values are missing inside the sample: 1992-07, 1992-08, "
        f"1997-07. {FILL}",
    ),
    "no value at all": (
        _empty, "",
        "small.csv, column z: there is no value in the column. Choose another series, or fill the "
        "column.",
    ),
    "never together": (
        _apart, "",
        'small.csv: no date has a value of every series of "x leads y" (x, y, z). Use series that '
        "overlap in time.",
    ),
    "log": (_negative, '[axes]\ntransformations = ["level", "log"]', NOT_POSITIVE),
    "growth": (_negative, '[axes]\ntransformations = ["yearly growth"]', NOT_POSITIVE),
    "log of one series": (
        _negative,
        '[axes]\ntransformations = [{ default = "level", series = { x = "log difference" } }]',
        NOT_POSITIVE,
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", SERIES)
def test_series_that_cannot_be_used(
    name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    change, tail, message = SERIES[name]
    plan = small_plans.write_plan(tmp_path, tail)
    data = tmp_path / "small.csv"
    frame = pd.read_csv(data)
    change(frame)
    frame.to_csv(data, index=False)
    refused(capsys, plan, message, ("check", "run"))


@pytest.mark.parametrize(
    ("before", "after", "message"),
    [
        ('effect = "y"', 'effect = "x"', 'findings[1].effect: cause and effect are both "x".'),
        (
            'given = ["z"]', 'given = ["y"]',
            'findings[1].given: "y" is already the cause or the effect.',
        ),
        (
            'given = ["z"]', 'given = ["z", "z"]',
            'findings[1].given: "z" stands twice. Leave one of them out.',
        ),
        (
            'given = ["z"]', 'given = ["zz"]',
            "small.csv: there is no column “zz”. Did you mean “z”? The columns are month, x, y, z, "
            "w, v.",
        ),
    ],
)  # fmt: skip
def test_roles_that_clash(
    before: str, after: str, message: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    plan = small_plans.write_plan(tmp_path)
    plan.write_text(plan.read_text(encoding="utf-8").replace(before, after), encoding="utf-8")
    refused(capsys, plan, message, ("check", "run"))


# -- the store -----------------------------------------------------------------------------


@pytest.fixture(scope="module")
def kept(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder with a plan, its data and its store."""
    folder = tmp_path_factory.mktemp("kept")
    sweep.run(small_plans.write_plan(folder), jobs=1)
    return folder


@pytest.fixture
def folder(kept: Path, tmp_path: Path) -> Path:
    return Path(shutil.copytree(kept, tmp_path / "copy"))


def commands(store: Path) -> list[tuple[object, ...]]:
    """Return every command that opens a store, beside which it would write."""
    out = store.parent / "out"
    return [
        ("run", store.with_suffix(".toml"), "--store", store, "--no-report"),
        ("show", store),
        ("explain", store, "baseline"),
        ("report", store, "--output", out.with_suffix(".html")),
        ("export", store, out),
        ("query", store, "SELECT 1"),
        ("chart", store, "windows", "--output", out.with_suffix(".svg")),
        ("table", store, "baseline", "--output", out.with_suffix(".csv")),
        ("verify", store),
        ("compare", store, store),
    ]


def _text(store: Path) -> None:
    store.write_text("This is no store.\n" * 200, encoding="utf-8")


def _nothing(store: Path) -> None:
    store.write_bytes(b"")


def _other_database(store: Path) -> None:
    store.unlink()
    with duckdb.connect(str(store)) as connection:
        connection.execute("CREATE TABLE meta (title VARCHAR)")


def _other_schema(store: Path) -> None:
    with duckdb.connect(str(store)) as connection:
        connection.execute("UPDATE meta SET schema_version = 99")


def _cut(store: Path) -> None:
    whole = store.read_bytes()
    store.write_bytes(whole[: len(whole) // 3])


def _folder(store: Path) -> None:
    store.unlink()
    store.mkdir()


NAME_IT = "Name the store that `crosswind run` wrote.\n"
# name: (what is done to the store, the message; "…" stands for the reader's own reason)
STORES = {
    "text": (_text, f"this is not a DuckDB file. {NAME_IT}"),
    "an empty file": (_nothing, f"this is not a DuckDB file. {NAME_IT}"),
    "another database": (
        _other_database, f"this DuckDB file is not a store of crosswind's. {NAME_IT}"
    ),
    "another schema": (
        _other_schema,
        f"the store has schema 99, this version of crosswind reads schema {SCHEMA_VERSION}. Use "
        "the crosswind that wrote it, or run the plan into a new store with --store.\n",
    ),
    "cut off": (
        _cut, "the store is damaged (…). Restore a copy, or move it away and run again.\n"
    ),
    "a folder": (_folder, f"this is a folder. {NAME_IT}"),
}  # fmt: skip


@pytest.mark.parametrize("name", STORES)
def test_a_store_that_cannot_be_used(
    name: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    change, message = STORES[name]
    store = folder / "plan.duckdb"
    change(store)
    before, names = content_of(folder), sorted(folder.iterdir())
    start, _, end = message.partition("…")
    for command in commands(store):
        code, words = said(capsys, *command)
        assert code == 5, command
        assert words.startswith(f"{store}: {start}"), command
        assert words.endswith(end), command
        assert (words == f"{store}: {message}") == ("…" not in message), command
        assert words.count("\n") == 1
        assert (content_of(folder), sorted(folder.iterdir())) == (before, names)


def test_a_store_that_is_not_there(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    store = folder / "absent.duckdb"
    before = sorted(folder.iterdir())
    for command in commands(store)[1:]:
        code, words = said(capsys, *command)
        assert code == 2, command
        assert words == f"{store}: there is no store here. Name an existing one, or run the plan.\n"
        assert sorted(folder.iterdir()) == before


def test_a_store_that_another_process_holds(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    store = folder / "plan.duckdb"
    code = (
        "import sys, duckdb\n"
        "held = duckdb.connect(sys.argv[1])\n"
        "print('held', flush=True)\n"
        "sys.stdin.read()\n"
    )
    holder = subprocess.Popen(
        [sys.executable, "-c", code, str(store)],
        stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True,
    )  # fmt: skip
    try:
        assert holder.stdout is not None
        assert holder.stdout.readline() == "held\n"
        names = sorted(path for path in folder.iterdir() if path.suffix != ".wal")
        for command in commands(store):
            left, words = said(capsys, *command)
            assert left == 5, command
            assert words == (
                f"{store}: the store is in use by process {holder.pid}. Wait until it has finished "
                "or stop it, then try again.\n"
            )
            assert sorted(p for p in folder.iterdir() if p.suffix != ".wal") == names
    finally:
        holder.kill()
        holder.communicate()
