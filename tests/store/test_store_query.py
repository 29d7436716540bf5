"""Questions in SQL: one that reads is answered, everything else is refused and does nothing."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import duckdb
import pandas as pd
import pytest
import small_plans

import sweep
from store.database import open_reading
from store.errors import QueryFault
from sweep.results import Results

TAIL = '[axes]\nlags = [1, 2, "AIC"]\nwindows = ["full sample", { rolling = 80, step = 20 }]'
ROWS = 18


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    return sweep.run(small_plans.write_plan(tmp_path_factory.mktemp("asked"), TAIL), jobs=1)


@pytest.mark.parametrize(
    "sql",
    [
        "SELECT count(*) AS n FROM outcomes WHERE sweep = $sweep",
        "WITH a AS (SELECT * FROM outcome) SELECT count(*) AS n FROM a;",
        "FROM outcome SELECT count(*) AS n -- all of them",
    ],
)
def test_what_reads_is_answered(results: Results, sql: str) -> None:
    assert results.query(sql)["n"].tolist() == [ROWS]


def test_the_frame_is_that_of_outcomes(results: Results) -> None:
    sql = "SELECT specification, p_value FROM outcomes WHERE sweep = $sweep AND lags_choice = 'AIC'"
    asked = results.query(sql).sort_values("specification", ignore_index=True)
    read = results.outcomes(["specification", "p_value"], "lags_choice = 'AIC'")
    pd.testing.assert_frame_equal(asked, read.sort_values("specification", ignore_index=True))


def test_columns_can_be_described(results: Results) -> None:
    described = results.query("DESCRIBE outcomes")
    assert set(results.outcomes().columns) == set(described["column_name"])
    assert "survival" in set(results.query("SHOW TABLES")["name"])


@pytest.mark.parametrize(
    "sql",
    [
        "COPY outcome TO '{folder}/out.csv'",
        "COPY (SELECT 1) TO '{folder}/out.parquet' (FORMAT parquet)",
        "EXPORT DATABASE '{folder}/out'",
        "ATTACH '{folder}/other.duckdb'",
        "ATTACH ':memory:' AS spare",
        "DETACH asked",
        "USE memory",
        "INSTALL httpfs",
        "LOAD httpfs",
        "PRAGMA database_list",
        "PRAGMA memory_limit = '9GB'",
        "SET memory_limit = '9GB'",
        "RESET threads",
        "CALL pragma_version()",
        "CHECKPOINT",
        "VACUUM",
        "BEGIN TRANSACTION",
        "CREATE TABLE mine AS SELECT 1",
        "CREATE TEMP TABLE mine AS SELECT 1",
        "CREATE MACRO mine() AS 1",
        "INSERT INTO sweep SELECT * FROM sweep",
        "UPDATE outcome SET p_value = 0",
        "DELETE FROM outcome",
        "DROP TABLE outcome",
        "ALTER TABLE outcome ADD COLUMN mine INTEGER",
        "PREPARE mine AS SELECT 1",
        "EXPLAIN ANALYZE SELECT 1",
    ],
)
def test_other_statements_are_refused(results: Results, tmp_path: Path, sql: str) -> None:
    held = results.store.read_bytes()
    with pytest.raises(QueryFault, match="only reading is allowed"):
        results.query(sql.format(folder=tmp_path))
    assert not list(tmp_path.iterdir())
    assert results.store.read_bytes() == held


@pytest.mark.parametrize(
    "source",
    [
        "read_csv('{folder}/secret.csv')",
        "read_text('{folder}/secret.csv')",
        "read_blob('{folder}/*')",
        "read_json('{folder}/secret.csv')",
        "read_parquet('{folder}/secret.csv')",
        "sniff_csv('{folder}/secret.csv')",
        "glob('{folder}/*')",
        "'{folder}/secret.csv'",
        "'{folder}/other.duckdb'",
        "read_csv('http://127.0.0.1:9/secret.csv')",
        "query('FROM read_csv(''{folder}/secret.csv'')')",
        "sqlite_scan('{folder}/secret.csv', 'a')",
    ],
)
def test_nothing_but_the_store_can_be_read(results: Results, tmp_path: Path, source: str) -> None:
    (tmp_path / "secret.csv").write_text("word\nhidden\n", encoding="utf-8")
    duckdb.connect(str(tmp_path / "other.duckdb")).execute("CREATE TABLE a AS SELECT 1").close()
    with pytest.raises(QueryFault) as caught:
        results.query(f"SELECT * FROM {source.format(folder=tmp_path)}")
    text = str(caught.value)
    assert "\n" not in text
    assert "hidden" not in text
    assert "SET " not in text


def test_python_variables_are_out_of_reach(results: Results) -> None:
    reachable = pd.DataFrame({"word": ["hidden"]})
    assert len(reachable) == 1
    with pytest.raises(QueryFault, match="reachable"):
        results.query("SELECT * FROM reachable")


@pytest.mark.parametrize(
    ("sql", "words"),
    [
        ("", "no statement"),
        (" ; -- nothing", "no statement"),
        ("SELECT 1; SELECT 2", "2 statements"),
        ("SELECT 1; DROP TABLE outcome", "2 statements"),
        ("SELCT 1", 'syntax error at or near "SELCT"'),
        ("SELECT nothere FROM outcomes", '"nothere" not found'),
        ("FROM outcomez", r'Did you mean "outcomes?"\?'),
        ("SELECT $other", r"only \$sweep has a value"),
        ("SELECT ?", "only"),
        ("SELECT CAST(finding AS INTEGER) FROM outcomes", "Could not convert"),
    ],
)
def test_faults_are_one_clear_line(results: Results, sql: str, words: str) -> None:
    with pytest.raises(QueryFault, match=words) as caught:
        results.query(sql)
    assert "\n" not in str(caught.value)
    assert str(caught.value).endswith((".", "?", "!"))


def test_too_much_memory_is_said(results: Results) -> None:
    """A list of two billion numbers, 16 GB, is past the limit of 1 GB wherever this runs."""
    with pytest.raises(QueryFault, match="needs more memory than the limit"):
        results.query("SELECT len(list(range)) FROM range(2000000000)")


def test_rows_come_in_portions(results: Results) -> None:
    with results.stream("SELECT range AS n FROM range(2500)", size=1000) as (columns, portions):
        assert columns == [("n", columns[0][1])]
        assert [len(rows) for rows in portions] == [1000, 1000, 500]
    with results.stream("SELECT 1 WHERE false") as (_, portions):
        assert list(portions) == []


def test_a_fault_halfway_is_told_too(results: Results) -> None:
    sql = "SELECT CASE WHEN range < 300000 THEN 1 ELSE error('halfway') END FROM range(400000)"
    with (
        pytest.raises(QueryFault, match="halfway"),
        results.stream(sql) as (_, portions),
    ):
        for _ in portions:
            pass


def test_the_view_of_a_large_sweep_is_not_held_in_memory(tmp_path: Path) -> None:
    """367,000 rows with their names pass through a limit of 45 MB, a sixth of what they take."""
    tail = '[axes]\nlags = [1, 2, "AIC"]\nwindows = ["full sample", { rolling = 60 }]'
    large = sweep.run(small_plans.write_plan(tmp_path, tail), jobs=1).store
    with duckdb.connect(str(large)) as connection:
        connection.execute(
            "INSERT INTO outcome SELECT o.* REPLACE (o.spec_low // 2 + range AS spec_low) "
            "FROM outcome AS o, range(1200)"
        )
    with open_reading(large, memory_limit="45MB", confined=True) as database:
        _, portions = database.stream("FROM outcomes")
        assert sum(len(rows) for rows in portions) == 1201 * 3 * (1 + 101)


@pytest.mark.skipif(
    not Path("/proc/self/status").exists(), reason="peak memory is read from /proc"
)
def test_large_answers_do_not_fill_memory(results: Results) -> None:
    """600,000 rows of a kilobyte, 600 MB as a whole, pass through less than 350 MB."""
    code = (
        "import re, sys, sweep\n"
        "results = sweep.open_results(sys.argv[1])\n"
        "sql = \"SELECT range, repeat('x', 1000) AS text FROM range(600000)\"\n"
        "with results.stream(sql) as (columns, portions):\n"
        "    print(sum(len(rows) for rows in portions))\n"
        "held = open('/proc/self/status').read()\n"
        "print(int(re.search(r'VmHWM:\\s+(\\d+) kB', held)[1]) // 1024)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(results.store)],
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    rows, megabytes = (int(line) for line in done.stdout.split())
    assert rows == 600_000
    assert megabytes < 350
