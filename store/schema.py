"""Version and history of the schema, and the SQL texts that come with the package."""

from __future__ import annotations

from functools import cache
from importlib import resources

__all__ = ["AXES", "HISTORY", "SCHEMA_VERSION", "STORAGE_VERSION", "VIEWS", "query", "schema_sql"]

# DuckDB's storage format: the oldest that has all we need, so that any 1.x reads a store.
STORAGE_VERSION = "v1.0.0"

# One line for each schema; the last one is current.
HISTORY = {
    1: "coded outcome table with small dictionaries; views judged, outcomes and survival",
}
SCHEMA_VERSION = max(HISTORY)

# Views in the order in which they build on each other.
VIEWS = ("judged", "outcomes", "survival")

# Axis names as the tables write them, in plan order; each is a code column of outcome.
AXES = (
    "lags",
    "deterministics",
    "window",
    "transformation",
    "test",
    "conditioning",
    "measures",
)


@cache
def query(name: str) -> str:
    """Return the text of ``queries/<name>.sql``."""
    return resources.files("store").joinpath("queries", f"{name}.sql").read_text("utf-8")


@cache
def schema_sql() -> str:
    """Return the text of ``schema.sql``: the tables, every column commented."""
    return resources.files("store").joinpath("schema.sql").read_text("utf-8")
