"""The schema text, its version, and the layers around the store."""

from __future__ import annotations

import ast
import re
from pathlib import Path

import store
from store import schema
from store.batches import OUTCOME_COLUMNS
from store.database import Database

ROOT = Path(store.__file__).parent


def test_every_column_is_commented() -> None:
    inside = False
    columns = 0
    for line in schema.schema_sql().splitlines():
        if line.startswith(("CREATE TABLE", ");")):
            inside = line.startswith("CREATE")
        elif inside:
            columns += 1
            assert re.fullmatch(r'    "?\w+"? [A-Z]+,?  -- \S.+', line), line
    assert columns > 90


def test_schema_names_every_stored_column(db: Database) -> None:
    columns = db.execute(
        "SELECT table_name, count(*) FROM duckdb_columns() JOIN duckdb_tables() USING (table_name) "
        "GROUP BY table_name"
    )
    listed = re.findall(r"CREATE TABLE (\w+) \((.*?)\n\);", schema.schema_sql(), flags=re.DOTALL)
    assert dict(columns) == {name: body.count("  -- ") for name, body in listed}
    names = db.execute(
        "SELECT column_name FROM duckdb_columns() WHERE table_name = 'outcome' "
        "ORDER BY column_index"
    )
    assert [name for (name,) in names] == ["sweep", *OUTCOME_COLUMNS]


def test_history_is_one_line_a_version() -> None:
    assert list(schema.HISTORY) == list(range(1, schema.SCHEMA_VERSION + 1))
    assert all(line.strip() and "\n" not in line for line in schema.HISTORY.values())


def test_every_query_opens_with_a_comment() -> None:
    texts = {path.stem: path.read_text() for path in (ROOT / "queries").glob("*.sql")}
    for name in texts.keys() - {"single_changes", "shortest_flips"}:
        assert texts[name].startswith("-- "), name
    # No query is left over: each is named once in the sources.
    sources = "".join(path.read_text() for path in ROOT.glob("*.py"))
    for name in texts:
        assert f'"{name}"' in sources, name


def test_the_store_stands_alone() -> None:
    for path in ROOT.glob("*.py"):
        for node in ast.walk(ast.parse(path.read_text())):
            names = []
            if isinstance(node, ast.Import):
                names = [alias.name for alias in node.names]
            elif isinstance(node, ast.ImportFrom):
                names = [node.module or ""]
            roots = {name.split(".")[0] for name in names}
            assert "sweep" not in roots, path.name
            assert "duckdb" not in roots or path.name == "database.py", path.name
