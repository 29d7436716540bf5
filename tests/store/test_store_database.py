"""Creating, opening, locking and refusing store files."""

from __future__ import annotations

import shutil
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import duckdb
import pytest

import store.database
from store.errors import (
    NotAStore,
    OtherSchema,
    StoreDamaged,
    StoreError,
    StoreExists,
    StoreLocked,
    StoreMissing,
)
from store.schema import SCHEMA_VERSION, STORAGE_VERSION

HOLDER = """
import sys
from store.database import open_writing
database = open_writing(sys.argv[1])
database.execute("INSERT INTO event VALUES (NULL, NULL, 'held', 'by another process')")
print("open", flush=True)
sys.stdin.read()
"""


@pytest.fixture
def path(tmp_path: Path) -> Path:
    file = tmp_path / "x.duckdb"
    store.database.create(file).close()
    return file


@pytest.fixture
def holder(path: Path) -> Iterator[subprocess.Popen[str]]:
    """Another process that has the store open for writing."""
    process = subprocess.Popen(
        [sys.executable, "-c", HOLDER, str(path)],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
        cwd=Path(store.__file__).parents[1],
    )
    try:
        assert process.stdout is not None
        assert process.stdout.readline() == "open\n"
        yield process
    finally:
        process.kill()
        process.communicate()


def test_create_sets_versions_and_limits(path: Path) -> None:
    with store.database.open_writing(path, memory_limit="300MB", threads=1) as db:
        assert db.scalar("SELECT schema_version FROM meta") == SCHEMA_VERSION
        assert db.scalar("SELECT current_setting('memory_limit')").startswith("286")
        assert db.scalar("SELECT current_setting('threads')") == 1
        assert db.scalar("SELECT count(*) FROM duckdb_indexes()") == 0
        assert db.scalar("SELECT count(*) FROM duckdb_constraints()") == 0
        tags = db.scalar("SELECT tags FROM duckdb_databases() WHERE database_name = 'x'")
        assert STORAGE_VERSION in tags["storage_version"]
    with store.database.open_reading(path, memory_limit="200MB", threads=2) as db:
        assert db.scalar("SELECT current_setting('threads')") == 2
        with pytest.raises(duckdb.InvalidInputException):
            db.execute("INSERT INTO event VALUES (NULL, NULL, 'x', 'y')")


def test_create_refuses_an_existing_file(path: Path) -> None:
    before = path.read_bytes()
    with pytest.raises(StoreExists, match="already a file"):
        store.database.create(path)
    assert path.read_bytes() == before


def test_create_leaves_nothing_behind_on_failure(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(store.database, "VIEWS", ("stored",))
    with pytest.raises(duckdb.Error):
        store.database.create(tmp_path / "x.duckdb")
    assert list(tmp_path.iterdir()) == []


def test_a_missing_file_or_folder_is_bad_usage(tmp_path: Path) -> None:
    with pytest.raises(StoreMissing, match="no store here") as caught:
        store.database.open_reading(tmp_path / "none.duckdb")
    assert caught.value.exit_code == 2
    with pytest.raises(StoreMissing, match=r"folder .* does not exist"):
        store.database.open_writing(tmp_path / "no" / "none.duckdb")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("open_", [store.database.open_reading, store.database.open_writing])
@pytest.mark.parametrize("content", [b"", b"date,freight\n2000-01,1\n" * 500])
def test_a_file_that_is_not_duckdb(tmp_path: Path, open_: object, content: bytes) -> None:
    file = tmp_path / "x.duckdb"
    file.write_bytes(content)
    with pytest.raises(NotAStore, match=r"x\.duckdb: this is not a DuckDB file\. ") as caught:
        open_(file)  # type: ignore[operator]
    assert caught.value.exit_code == 5
    assert "\n" not in str(caught.value)
    assert file.read_bytes() == content
    assert [p.name for p in tmp_path.iterdir()] == ["x.duckdb"]


@pytest.mark.parametrize("open_", [store.database.open_reading, store.database.open_writing])
def test_a_folder_is_not_a_store(tmp_path: Path, open_: object) -> None:
    with pytest.raises(NotAStore, match="this is a folder"):
        open_(tmp_path)  # type: ignore[operator]


@pytest.mark.parametrize("open_", [store.database.open_reading, store.database.open_writing])
@pytest.mark.parametrize("table", ["CREATE TABLE prices (x INT)", "CREATE TABLE meta (x INT)"])
def test_a_duckdb_file_of_somebody_else(tmp_path: Path, open_: object, table: str) -> None:
    file = tmp_path / "x.duckdb"
    with duckdb.connect(str(file)) as connection:
        connection.execute(table)
    before = file.read_bytes()
    with pytest.raises(NotAStore, match="not a store of crosswind's"):
        open_(file)  # type: ignore[operator]
    assert file.read_bytes() == before


@pytest.mark.parametrize("open_", [store.database.open_reading, store.database.open_writing])
def test_a_store_of_another_schema(path: Path, open_: object) -> None:
    with duckdb.connect(str(path)) as connection:
        connection.execute("UPDATE meta SET schema_version = 99")
    before = path.read_bytes()
    with pytest.raises(OtherSchema, match=r"has schema 99, .* reads schema 1") as caught:
        open_(path)  # type: ignore[operator]
    assert caught.value.exit_code == 5
    assert path.read_bytes() == before


def test_a_damaged_store(path: Path) -> None:
    with store.database.open_writing(path) as db:
        db.execute("INSERT INTO event SELECT NULL, NULL, 'x', range FROM range(100000)")
    content = path.read_bytes()
    path.write_bytes(content[: len(content) // 3])
    with pytest.raises(StoreDamaged, match="is damaged") as caught:
        store.database.open_reading(path)
    assert caught.value.exit_code == 5
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("open_", [store.database.open_reading, store.database.open_writing])
def test_a_locked_store_names_the_process(
    path: Path, holder: subprocess.Popen[str], open_: object
) -> None:
    with pytest.raises(StoreLocked, match=rf"in use by process {holder.pid}\. Wait") as caught:
        open_(path)  # type: ignore[operator]
    assert caught.value.process == holder.pid
    assert caught.value.exit_code == 5
    assert isinstance(caught.value, StoreError)
    assert "\n" not in str(caught.value)


def test_what_a_killed_process_committed_is_there(
    path: Path, holder: subprocess.Popen[str]
) -> None:
    holder.kill()
    holder.wait()
    for open_ in (store.database.open_reading, store.database.open_writing):
        with open_(path) as db:
            assert db.scalar("SELECT text FROM event") == "by another process"


def test_two_settings_in_one_process(path: Path) -> None:
    with (
        store.database.open_reading(path, threads=1),
        pytest.raises(StoreLocked, match="already open in this process"),
    ):
        store.database.open_writing(path, threads=2)


def test_a_copy_opens_under_another_name(path: Path) -> None:
    copy = path.with_name("it's a copy.duckdb")
    shutil.copy(path, copy)
    with store.database.open_reading(copy) as db:
        assert db.scalar("SELECT count(*) FROM survival") == 0


def test_a_transaction_is_undone_on_any_exception(path: Path) -> None:
    with store.database.open_writing(path) as db:
        with pytest.raises(KeyboardInterrupt), db.transaction():  # noqa: PT012
            db.execute("INSERT INTO event VALUES (NULL, NULL, 'x', 'y')")
            raise KeyboardInterrupt
        with pytest.raises(duckdb.ConversionException), db.transaction():  # noqa: PT012
            db.execute("INSERT INTO event VALUES (NULL, NULL, 'x', 'y')")
            db.execute("INSERT INTO event SELECT 'no date', NULL, 'x', 'y'")
        assert db.scalar("SELECT count(*) FROM event") == 0
        with db.transaction():
            db.execute("INSERT INTO event VALUES (NULL, NULL, 'x', 'y')")
        assert db.scalar("SELECT count(*) FROM event") == 1
