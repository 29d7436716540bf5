"""What can go wrong with a store, each message one line that names the file and the mend."""

from __future__ import annotations

__all__ = [
    "Ambiguous",
    "BadBatch",
    "NotAStore",
    "NotFound",
    "NotWritten",
    "NothingStored",
    "OtherSchema",
    "QueryFault",
    "StoreDamaged",
    "StoreError",
    "StoreExists",
    "StoreLocked",
    "StoreMissing",
]


class StoreError(Exception):
    """Base of every fault of a store file that is reported without a traceback."""

    exit_code = 5


class StoreLocked(StoreError):
    """Another process, or another connection of this one, has the file open.

    Parameters
    ----------
    message : str
        The line for the user.
    process : int or None
        Id of the process that holds the file, where DuckDB names it.
    """

    def __init__(self, message: str, process: int | None = None) -> None:
        self.process = process
        super().__init__(message)


class NotAStore(StoreError):
    """The file is not a DuckDB database, or one that crosswind did not create."""


class OtherSchema(StoreError):
    """The store was written with another schema version."""


class StoreDamaged(StoreError):
    """The file begins like a store but cannot be read."""


class StoreExists(StoreError):
    """A new store was asked for where a file already is."""


class StoreMissing(StoreError):
    """There is no file, or no folder, at the path; bad usage rather than a bad store."""

    exit_code = 2


class NotWritten(StoreError):
    """A file of an export cannot be written; bad usage rather than a bad store."""

    exit_code = 2


class QueryFault(StoreError):
    """A query that is not one plain question, or that cannot be answered; bad usage."""

    exit_code = 2


class BadBatch(ValueError):
    """Rows offered to the store break its contract; nothing was written."""


class NotFound(LookupError):
    """Nothing in the store answers to the sweep, finding or specification named."""


class NothingStored(NotFound):
    """A run into this sweep was stopped before it stored anything."""


class Ambiguous(LookupError):
    """A prefix of a specification matches several."""
