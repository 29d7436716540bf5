"""Opening, creating and talking to a store file; the only module that imports duckdb."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from datetime import UTC, datetime
from importlib import metadata
from pathlib import Path
from typing import Any

import duckdb
import pandas as pd

from store.errors import (
    NotAStore,
    NotWritten,
    OtherSchema,
    QueryFault,
    StoreDamaged,
    StoreError,
    StoreExists,
    StoreLocked,
    StoreMissing,
)
from store.records import Statement
from store.schema import SCHEMA_VERSION, STORAGE_VERSION, VIEWS, query, schema_sql

__all__ = ["Database", "create", "now", "open_reading", "open_writing"]

# The log is folded into the file in larger portions than DuckDB's 16 MB: a million rows in
# batches of 50,000 then take 2.4 s instead of 3.4 s.
_WRITING = {"storage_compatibility_version": STORAGE_VERSION, "checkpoint_threshold": "64MB"}
# For questions that a user wrote: no file, no network, no Python variable, no other setting.
_CONFINED = {
    "enable_external_access": False,
    "python_enable_replacements": False,
    "lock_configuration": True,
}

Parameters = Sequence[Any] | Mapping[str, Any] | None


def now() -> datetime:
    """Return the time in universal time without a zone, as the store keeps it."""
    return datetime.now(UTC).replace(tzinfo=None)


class Database:
    """One connection to a store, with its memory limit and threads set.

    Parameters
    ----------
    path : pathlib.Path
        The store file.
    connection : duckdb.DuckDBPyConnection
        Open connection; this object closes it.

    Notes
    -----
    Made by :func:`create`, :func:`open_writing` and :func:`open_reading`; use as a context
    manager.
    """

    def __init__(self, path: Path, connection: duckdb.DuckDBPyConnection) -> None:
        self.path = path
        self._connection = connection

    def execute(self, sql: str, params: Parameters = None) -> list[tuple[Any, ...]]:
        """Run a statement and return its rows (empty for statements without rows)."""
        self._connection.execute(sql, params) if params else self._connection.execute(sql)
        return self._connection.fetchall() if self._connection.description else []

    def frame(self, sql: str, params: Parameters = None) -> pd.DataFrame:
        """Run a query and return its rows as a pandas frame."""
        self._connection.execute(sql, params) if params else self._connection.execute(sql)
        frame: pd.DataFrame = self._connection.df()
        return frame

    def copy(self, sql: str, path: Path, options: str) -> None:
        """Write the rows of a query to a file.

        Raises
        ------
        NotWritten
            The file cannot be written.
        """
        quoted = str(path).replace("'", "''")
        try:
            self.execute(f"COPY ({sql}) TO '{quoted}' ({options})")
        except duckdb.IOException as error:
            raise NotWritten(f"{path}: the file cannot be written. {_told(error)}") from None

    def scalar(self, sql: str, params: Parameters = None) -> Any:
        """Return the first cell of a query, or None where it has no rows."""
        rows = self.execute(sql, params)
        return rows[0][0] if rows else None

    def statements(self, sql: str) -> list[Statement]:
        """Take a user's SQL apart; runs nothing.

        Raises
        ------
        QueryFault
            It is no SQL.
        """
        with _question():
            return [
                Statement(str(found.type.name), frozenset(found.named_parameters))
                for found in self._connection.extract_statements(sql)
            ]

    def asked(self, sql: str, params: Parameters = None) -> pd.DataFrame:
        """Run a user's query and return its rows as a pandas frame.

        Raises
        ------
        QueryFault
            It cannot be answered.
        """
        with _question():
            return self.frame(sql, params)

    def stream(
        self, sql: str, params: Parameters = None, size: int = 1000
    ) -> tuple[list[tuple[str, str]], Iterator[list[tuple[Any, ...]]]]:
        """Run a user's query and return its rows in portions, never all at once.

        Returns
        -------
        columns : list of (name, type)
        portions : iterator of lists of rows
            At most ``size`` rows each; QueryFault where reading on fails.

        Raises
        ------
        QueryFault
            It cannot be answered.
        """
        with _question():
            self._connection.execute(sql, params) if params else self._connection.execute(sql)
            columns = [(str(item[0]), str(item[1])) for item in self._connection.description or ()]
        return columns, self._portions(size)

    def _portions(self, size: int) -> Iterator[list[tuple[Any, ...]]]:
        while True:
            with _question():
                rows = self._connection.fetchmany(size)
            if not rows:
                return
            yield rows

    def register(self, name: str, frame: pd.DataFrame) -> None:
        """Make a pandas frame readable under a name until :meth:`unregister`."""
        self._connection.register(name, frame)

    def unregister(self, name: str) -> None:
        """Forget a registered frame."""
        self._connection.unregister(name)

    @contextmanager
    def registered(self, name: str, frame: pd.DataFrame) -> Iterator[None]:
        """Register a frame for the length of a ``with`` block."""
        self.register(name, frame)
        try:
            yield
        finally:
            self.unregister(name)

    @contextmanager
    def transaction(self) -> Iterator[None]:
        """Commit what the ``with`` block did, or undo all of it on any exception."""
        self._connection.execute("BEGIN TRANSACTION")
        try:
            yield
        except BaseException:
            # Where DuckDB has already given the transaction up, there is nothing to undo.
            with suppress(duckdb.TransactionException):
                self._connection.execute("ROLLBACK")
            raise
        self._connection.execute("COMMIT")

    def attach(self, path: Path, name: str) -> None:
        """Make the tables and views of another store readable under a name."""
        quoted = str(path).replace("'", "''")
        try:
            self._connection.execute(f"ATTACH '{quoted}' AS {name} (READ_ONLY)")
        except duckdb.Error as error:
            raise _explained(path, error) from error

    def checkpoint(self) -> None:
        """Write the log into the store file."""
        self._connection.execute("CHECKPOINT")

    def close(self) -> None:
        """Close the connection; other processes can then open the store."""
        self._connection.close()

    def __enter__(self) -> Database:
        return self

    def __exit__(self, *exception: object) -> None:
        self.close()


def create(
    path: str | os.PathLike[str], *, memory_limit: str = "1GB", threads: int | None = None
) -> Database:
    """Create a new store and return it open for writing.

    Parameters
    ----------
    path : path
        File that must not exist yet, in a folder that does.
    memory_limit : str
        DuckDB's memory limit, such as ``"1GB"``.
    threads : int, optional
        Threads of DuckDB; all available cores where not given.

    Raises
    ------
    StoreExists
        A file is already there.
    StoreMissing
        The folder does not exist.
    StoreError
        The file cannot be created; nothing is left behind.
    """
    file = Path(path)
    if file.exists():
        raise StoreExists(
            f"{file}: there is already a file. Choose another place with --store, or remove it."
        )
    if not file.parent.is_dir():
        raise StoreMissing(f"{file}: the folder {file.parent} does not exist. Create it first.")
    _check_folder(file)
    database = Database(file, _connect(file, _config(memory_limit, threads) | _WRITING))
    try:
        with database.transaction():
            database.execute(schema_sql())
            for view in VIEWS:
                database.execute(query(view))
            database.execute(
                "INSERT INTO meta VALUES (?, ?, ?, ?)",
                [SCHEMA_VERSION, now(), _version("crosswind"), duckdb.__version__],
            )
        database.checkpoint()
    except BaseException:
        database.close()
        file.unlink(missing_ok=True)
        file.with_name(file.name + ".wal").unlink(missing_ok=True)
        raise
    return database


def open_writing(
    path: str | os.PathLike[str], *, memory_limit: str = "1GB", threads: int | None = None
) -> Database:
    """Open a store for writing, creating it where there is no file yet.

    Parameters and errors are those of :func:`open_reading` and :func:`create`.  The
    schema is checked through a read-only connection first, so a file that is refused is
    left untouched.
    """
    file = Path(path)
    if not file.exists():
        return create(file, memory_limit=memory_limit, threads=threads)
    open_reading(file, memory_limit=memory_limit, threads=threads).close()
    _check_folder(file)
    return Database(file, _connect(file, _config(memory_limit, threads) | _WRITING))


def open_reading(
    path: str | os.PathLike[str],
    *,
    memory_limit: str = "1GB",
    threads: int | None = None,
    confined: bool = False,
) -> Database:
    """Open an existing store read-only.

    Parameters
    ----------
    path : path
        The store file.
    memory_limit : str
        DuckDB's memory limit, such as ``"1GB"``.
    threads : int, optional
        Threads of DuckDB; all available cores where not given.
    confined : bool
        For SQL that a user wrote: nothing but this store can be read (no file, no network,
        no Python variable, no extension) and no setting can be changed.

    Raises
    ------
    StoreMissing
        There is no such file.
    StoreLocked
        Another process is writing; the message names it.
    NotAStore
        The file is not a DuckDB file, or not one of crosswind's.
    OtherSchema
        Another schema version wrote it.
    StoreDamaged
        The file cannot be read through.
    """
    file = Path(path)
    if not file.exists():
        raise StoreMissing(
            f"{file}: there is no store here. Name an existing one, or run the plan."
        )
    config = _config(memory_limit, threads) | (_CONFINED if confined else {})
    database = Database(file, _connect(file, config, read_only=True))
    try:
        _check_schema(database)
    except BaseException:
        database.close()
        raise
    return database


def _check_folder(file: Path) -> None:
    """Refuse a folder that DuckDB cannot write its log into, which stands beside the store."""
    if not os.access(file.parent, os.W_OK | os.X_OK):
        raise StoreError(
            f"{file}: nothing may be written into the folder of the store. Name another store with "
            "--store, or change the folder's permissions."
        )


def _config(memory_limit: str, threads: int | None) -> dict[str, Any]:
    return {
        "memory_limit": memory_limit,
        "threads": threads or _cores(),
        # A store needs no extension, and a lookup for one must never reach the network.
        "autoinstall_known_extensions": False,
        "autoload_known_extensions": False,
        # Our views join the large table to small dictionaries, in this order; DuckDB takes the
        # large one for a single row, would hold it in memory and fail at a million rows.
        "disabled_optimizers": "build_side_probe_side",
    }


def _cores() -> int:
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def _version(package: str) -> str:
    try:
        return metadata.version(package)
    except metadata.PackageNotFoundError:
        return "not installed"


def _connect(
    file: Path, config: dict[str, Any], read_only: bool = False
) -> duckdb.DuckDBPyConnection:
    if read_only and not _is_duckdb(file):
        raise NotAStore(
            f"{file}: this is {'a folder' if file.is_dir() else 'not a DuckDB file'}. Name the "
            "store that `crosswind run` wrote."
        )
    try:
        return duckdb.connect(str(file), read_only=read_only, config=config)
    except duckdb.Error as error:
        raise _explained(file, error) from error


def _is_duckdb(file: Path) -> bool:
    """Say whether a file begins as DuckDB's do; unreadable ones are left to DuckDB."""
    if file.is_dir():
        return False
    try:
        with file.open("rb") as opened:
            return opened.read(12)[8:] == b"DUCK"
    except OSError:
        return True


def _explained(file: Path, error: duckdb.Error) -> StoreError:
    """Turn DuckDB's message on opening a file into ours."""
    text = str(error)
    if "lock on file" in text:
        match = re.search(r"PID (\d+)", text)
        process = int(match[1]) if match else None
        holder = f"process {process}" if process else "another process"
        return StoreLocked(
            f"{file}: the store is in use by {holder}. "
            "Wait until it has finished or stop it, then try again.",
            process,
        )
    if isinstance(error, duckdb.ConnectionException):
        return StoreLocked(
            f"{file}: the store is already open in this process (process {os.getpid()}) with other "
            "settings. Close it, then try again.",
            os.getpid(),
        )
    if "not a valid DuckDB database file" in text or file.is_dir():
        return NotAStore(
            f"{file}: this is not a DuckDB file. Name the store that `crosswind run` wrote."
        )
    if "version number" in text:
        return OtherSchema(
            f"{file}: a newer DuckDB wrote this file than the one installed "
            f"({duckdb.__version__}). Install a newer duckdb package to read it."
        )
    if isinstance(error, duckdb.PermissionException) or "ermission denied" in text:
        return StoreError(f"{file}: the file may not be opened. Check its permissions.")
    return _damaged(file, error)


@contextmanager
def _question() -> Iterator[None]:
    """Turn what DuckDB says of a user's query into one line of ours."""
    try:
        yield
    except duckdb.Error as error:
        raise QueryFault(f"The query cannot be answered: {_told(error)}") from None


def _told(error: duckdb.Error) -> str:
    """Return DuckDB's message on a query in one line, without its picture of the place."""
    if isinstance(error, duckdb.OutOfMemoryException):
        return "it needs more memory than the limit. Ask for fewer rows or columns, or count them."
    text = str(error)
    if isinstance(error, duckdb.PermissionException):
        return "a query reads this store only: no other file, no network, no other database."
    if "extension" in text:
        return "it needs an extension, and a query loads none. Use what DuckDB has built in."
    told = " ".join(text.split("LINE 1:", maxsplit=1)[0].split())
    return told if told.endswith((".", "!", "?")) else told + "."


def _damaged(file: Path, error: duckdb.Error) -> StoreDamaged:
    detail = str(error).splitlines()[0].rstrip(".!")
    return StoreDamaged(
        f"{file}: the store is damaged ({detail}). Restore a copy, or move it away and run again."
    )


def _check_schema(database: Database) -> None:
    try:
        version = database.scalar("SELECT max(schema_version) FROM meta")
    except (duckdb.CatalogException, duckdb.BinderException):
        version = None
    except duckdb.Error as error:
        raise _damaged(database.path, error) from error
    if version is None:
        raise NotAStore(
            f"{database.path}: this DuckDB file is not a store of crosswind's. "
            "Name the store that `crosswind run` wrote."
        )
    if version != SCHEMA_VERSION:
        raise OtherSchema(
            f"{database.path}: the store has schema {version}, this version of crosswind "
            f"reads schema {SCHEMA_VERSION}. Use the crosswind that wrote it, or run the plan "
            "into a new store with --store."
        )
