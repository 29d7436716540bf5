"""No command destroys a file: stores, plans, data and files of other kinds stay as they are."""

from __future__ import annotations

import os
import shutil
import stat
from pathlib import Path

import pytest
import small_plans

import sweep
from sweep.cli import main
from sweep.errors import InputFault

NOT_OURS = {
    "notes.txt": b"some notes\n", "picture.png": b"\x89PNG\r\n", "table.csv": b"a,b\n1,2\n",
    "list.json": b"[1, 2]\n", "own.toml": b"title = 1\n",
}  # fmt: skip


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


@pytest.fixture
def store(tmp_path: Path) -> Path:
    for name, content in NOT_OURS.items():
        (tmp_path / name).write_bytes(content)
    made = sweep.run(small_plans.write_plan(tmp_path, "[axes]\nlags = [1, 2]"), jobs=1).store
    shutil.copyfile(made, tmp_path / "other.duckdb")
    return made


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


# Each command with the place of its output; "" stands for what is tried.
COMMANDS = {
    "report": ["report", "plan.duckdb", "--output", ""],
    "schema": ["schema", "--output", ""],
    "new": ["new", "small.csv", "--overwrite", "--output", ""],
    "compare": ["compare", "plan.duckdb", "other.duckdb", "--output", ""],
}
KIND = {"report": ".html", "compare": ".html", "schema": ".json", "new": ".toml"}


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize("target", ["plan.duckdb", "plan.toml", "small.csv", *NOT_OURS])
def test_what_is_there_is_not_written_over(
    store: Path, command: str, target: str, monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(store.parent)
    before = contents(store.parent)
    arguments = [argument or target for argument in COMMANDS[command]]
    if KIND[command] == Path(target).suffix:
        # A file of the same kind is replaced, as asked for.
        assert call(*arguments) == 0
        return
    capsys.readouterr()
    assert call(*arguments) == 2
    shown = capsys.readouterr()
    assert shown.err.splitlines()[-1].startswith(f"{target}: ")
    assert "not written over" in shown.err
    assert "Traceback" not in shown.err
    assert contents(store.parent) == before


@pytest.mark.parametrize("command", COMMANDS)
def test_files_of_the_kind_are_replaced(
    store: Path, command: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(store.parent)
    target = "out" + KIND[command]
    arguments = [argument or target for argument in COMMANDS[command]]
    assert call(*arguments) == 0
    first = Path(target).read_bytes()
    assert call(*arguments) == 0
    assert len(Path(target).read_bytes()) == len(first)
    Path(target).write_bytes(b"")
    assert call(*arguments) == 0
    assert Path(target).read_bytes()


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize("target", ["", "a folder", "no/such/folder/x.html"])
def test_places_that_cannot_be_written(
    store: Path, command: str, target: str, monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(store.parent)
    Path("a folder").mkdir()
    before = sorted(store.parent.iterdir())
    arguments = [argument or target for argument in COMMANDS[command]]
    assert call(*arguments) == 2
    shown = capsys.readouterr().err
    assert {"": "the name is empty", "a folder": "a folder is no file to write"}.get(
        target, "the file cannot be written (No such file or directory)"
    ) in shown
    assert sorted(store.parent.iterdir()) == before


def test_an_example_replaces_only_examples(
    store: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(store.parent)
    assert call("new", "--example", "harbour") == 0
    assert call("new", "--example", "harbour", "--overwrite") == 0
    before = contents(Path("data"))
    Path("data/harbour.csv").write_bytes(b"month,price\n1990-01,3\n")
    plan = Path("harbour.toml").read_bytes()
    Path("harbour.toml").write_bytes(plan + b"# mine\n")
    assert call("new", "--example", "harbour", "--overwrite") == 2
    assert "harbour.csv: the file that is there is not such a CSV" in capsys.readouterr().err
    assert Path("harbour.toml").read_bytes().endswith(b"# mine\n")
    assert set(contents(Path("data"))) == set(before)
    assert call("new", "--example", "harbour", "--output", "plan.toml") == 2
    assert "plan.toml: this is a file. Name a folder." in capsys.readouterr().err


def test_python_is_as_careful(store: Path) -> None:
    results = sweep.open_results(store)
    before = contents(store.parent)
    for target in (store, store.with_suffix(".toml"), store.parent / "small.csv"):
        with pytest.raises(InputFault, match="not written over"):
            results.report(target)
    with pytest.raises(InputFault, match="the name is empty"):
        results.export("")
    linked = store.with_name("linked.html")
    linked.symlink_to(store)
    with pytest.raises(InputFault, match="these results come from this file"):
        results.report(linked)
    linked.unlink()
    assert contents(store.parent) == before


@pytest.mark.parametrize(
    ("target", "replaced"),
    [("small.csv", False), ("list.json", True), ("picture.png", True), ("x.svg", False)],
)
def test_charts_replace_files_of_their_kind_only(
    store: Path, target: str, replaced: bool, monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(store.parent)
    Path("x.svg").write_text("no picture", encoding="utf-8")
    before = contents(store.parent)
    assert call("chart", "plan.duckdb", "windows", "-o", target) == (0 if replaced else 2)
    assert ("not written over" in capsys.readouterr().err) is not replaced
    assert (contents(store.parent) == before) is not replaced
    assert call("chart", "plan.duckdb", "windows", "-o", "numbers.csv") == 0
    assert call("chart", "plan.duckdb", "windows", "-o", "numbers.csv") == 0


@pytest.mark.parametrize(
    ("target", "replaced"),
    [("small.csv", False), ("table.csv", False), ("own.toml", False), ("plan.duckdb", False),
     ("notes.md", True), ("notes.txt", False)],
)  # fmt: skip
def test_tables_replace_files_of_their_kind_only(
    store: Path, target: str, replaced: bool, monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(store.parent)
    Path("notes.md").write_text("old", encoding="utf-8")
    before = contents(store.parent)
    form = "csv" if target.endswith(".csv") else "markdown"
    arguments = ("table", "plan.duckdb", "survival", "--format", form, "-o")
    assert call(*arguments, target) == (0 if replaced else 2)
    assert ("not written over" in capsys.readouterr().err) is not replaced
    assert (contents(store.parent) == before) is not replaced
    assert call("table", "plan.duckdb", "survival", "-o", "numbers.csv") == 0
    assert call("table", "plan.duckdb", "attrition", "-o", "numbers.csv") == 0
    assert call(*arguments, "") == 2


def test_an_export_replaces_only_exports(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = store.parent / "files"
    assert call("export", store, folder) == 0
    assert call("export", store, folder) == 0
    for name in ("outcomes.csv", "details.parquet"):
        kept = (folder / name).read_bytes()
        (folder / name).write_bytes(b"month,x\n1990-01,2\n")
        before = contents(folder)
        capsys.readouterr()
        assert call("export", store, folder) == 2
        assert f"{name}: the file that is there is not" in capsys.readouterr().err
        assert contents(folder) == before
        (folder / name).write_bytes(kept)
    capsys.readouterr()
    assert call("export", store, store) == 2
    assert call("export", store, "") == 2
    assert "the name is empty" in capsys.readouterr().err


def _closed(monkeypatch: pytest.MonkeyPatch, folder: Path) -> None:
    """Take the right to write into a folder; the superuser is told the same as others."""
    folder.chmod(stat.S_IRUSR | stat.S_IXUSR)
    real = os.access

    def access(path: object, mode: int, **options: bool) -> bool:
        closed = mode & os.W_OK and Path(str(path)).resolve() == folder.resolve()
        return False if closed else real(str(path), mode, **options)

    monkeypatch.setattr(os, "access", access)


def test_an_export_into_a_closed_folder(
    store: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = store.parent / "closed"
    folder.mkdir()
    with monkeypatch.context() as patched:
        _closed(patched, folder)
        assert call("export", store, folder) == 2
    folder.chmod(0o700)
    assert capsys.readouterr().err == (
        f"{folder}: nothing may be written into this folder. Give another folder.\n"
    )
    assert not list(folder.iterdir())


def test_a_run_into_a_closed_folder(
    store: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """DuckDB writes its log beside the store, so the folder must be open as well."""
    before = contents(store.parent)
    plan = store.with_suffix(".toml")
    with monkeypatch.context() as patched:
        _closed(patched, store.parent)
        assert call("run", plan, "--no-report") == 5
    store.parent.chmod(0o700)
    shown = capsys.readouterr().err
    assert shown.startswith(f"{store}: nothing may be written into the folder of the store.")
    assert contents(store.parent) == before
