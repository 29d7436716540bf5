"""crosswind chart: every format, what is refused, and that nothing is left half written."""

from __future__ import annotations

import csv
import json
import re
import shutil
from pathlib import Path
from xml.etree import ElementTree

import altair
import pandas as pd
import pytest
import small_plans

import sweep
from sweep.charts import CHARTS, chart
from sweep.charts.theme import WIDTHS
from sweep.cli import main
from sweep.errors import InputFault
from sweep.report import chart_files
from sweep.report.chart_files import FORMATS, frame_csv, targets
from sweep.results import Results

TAIL = '[axes]\nlags = [1, 2, "AIC"]\nwindows = ["full sample", { rolling = 80, step = 20 }]'
OTHER = '\n[[findings]]\nname = "z leads y"\ncause = "z"\neffect = "y"\n'
STARTS = {"svg": b"<svg ", "pdf": b"%PDF", "png": b"\x89PNG", "html": b"<!doctype html>"}


def call(*arguments: object) -> int:
    with pytest.raises(SystemExit) as left:
        main([str(argument) for argument in arguments])
    return int(left.value.code or 0)


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    folder = tmp_path_factory.mktemp("chart")
    return sweep.run(small_plans.write_plan(folder, TAIL, OTHER), jobs=1)


@pytest.fixture
def store(results: Results, tmp_path: Path) -> Path:
    return Path(shutil.copy(results.store, tmp_path / "own.duckdb"))


def test_charts_are_listed_with_their_questions(capsys: pytest.CaptureFixture[str]) -> None:
    assert call("chart", "--list") == 0
    lines = capsys.readouterr().out.splitlines()
    assert [re.split(r"  +", line) for line in lines] == [
        [name, chart(name).QUESTION] for name in CHARTS
    ]


@pytest.mark.parametrize("name", CHARTS)
def test_every_chart_as_every_file(
    name: str, store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    stem = tmp_path / "figures.v1"
    assert call("chart", store, name.replace(" ", "-"), "-o", stem, "--format", "all") == 0
    printed = capsys.readouterr()
    assert 'Finding: "x leads y", the first of 2' in printed.err
    made = {path.suffix[1:]: path for path in tmp_path.glob("figures.v1.*")}
    assert set(made) == set(FORMATS)
    assert len(printed.out.split()) == len(FORMATS)
    for form, start in STARTS.items():
        assert made[form].read_bytes().startswith(start), form
    ElementTree.fromstring(made["svg"].read_text(encoding="utf-8"))
    values = json.loads(made["json"].read_text(encoding="utf-8"))
    altair.Chart.from_dict(values)  # held against the schema of the language
    assert values["description"] in made["txt"].read_text(encoding="utf-8")
    page = made["html"].read_text(encoding="utf-8")
    assert not re.search(r"\b(src|href|action)=", page.split("<script>")[0])
    assert "What the numbers do not say" in page
    with made["csv"].open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    assert len({len(row) for row in rows}) == 1
    assert len(rows) > 1 or name == "flips"  # nothing turns this finding


def test_numbers_behind_a_chart_are_those_of_the_store(
    results: Results, store: Path, tmp_path: Path
) -> None:
    path = tmp_path / "s.csv"
    assert call("chart", store, "survival by choice", "-o", path) == 0
    found = pd.read_csv(path)
    expected = results.survival(finding="x leads y").reset_index(drop=True)
    pd.testing.assert_frame_equal(found, expected, check_dtype=False, check_exact=True)


def test_the_file_beside_the_store_and_its_finding(
    store: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert call("chart", store, "Attrition", "--finding", "z leads y") == 0
    printed = capsys.readouterr()
    assert printed.err == ""
    made = store.with_name("own-attrition.svg")
    assert Path(printed.out.strip()).name == made.name
    assert "from z to y" in made.read_text(encoding="utf-8")


@pytest.mark.parametrize("width", WIDTHS)
def test_the_width_is_that_of_print(width: str, store: Path, tmp_path: Path) -> None:
    path = tmp_path / "w.SVG"
    assert call("chart", store, "windows", "-o", path, "--width", width) == 0
    drawn = re.search(r'width="([\d.]+)"', path.read_text(encoding="utf-8"))
    assert drawn is not None
    assert float(drawn.group(1)) / 96 * 25.4 == pytest.approx(
        {"wide": 175, "narrow": 85}[width], abs=0.3
    )


def test_two_axes_takes_a_pair_and_the_curve_a_scale(store: Path, tmp_path: Path) -> None:
    path = tmp_path / "p.csv"
    assert call("chart", store, "two-axes", "--axes", "window, lags", "-o", path) == 0
    found = pd.read_csv(path)
    assert found[["row_axis", "column_axis"]].drop_duplicates().to_numpy().tolist() == [
        ["lags", "window"]
    ]
    assert call("chart", store, "specification-curve", "--scale", "all", "-o", path) == 0
    assert pd.read_csv(path)["scale"].unique().tolist() == ["all"]


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["two axis"], 'chart: no chart is called "two axis"; did you mean "two axes"?'),
        (["windows", "--axes", "lags,test"], 'the chart "windows" takes none. "two axes" does.'),
        (["windows", "--scale", "all"], '"specification curve" does.'),
        (["two axes", "--axes", "lags"], "two different axes are needed"),
        (["two axes", "--axes", "lag,window"], 'did you mean "lags"?'),
        (["specification curve", "--scale", "levels"], 'no scale "levels"'),
        (["windows", "-o", "w.gif"], "its ending does not say how to write the chart"),
        (["windows", "-o", "w"], "its ending does not say how to write the chart"),
        (["windows", "--format", "svg,jpg"], 'no format "jpg"'),
        (["windows", "--format", "vsg"], 'did you mean "svg"?'),
        (["windows", "--finding", "x lead y"], 'did you mean "x leads y"?'),
        (["windows", "--width", "broad"], "'broad' is not one of"),
        (["windows", "-o", "no/folder.svg"], "the file cannot be written"),
    ],
)
def test_what_is_refused_leaves_nothing(
    arguments: list[str], message: str, store: Path, tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str],
) -> None:  # fmt: skip
    monkeypatch.chdir(tmp_path)
    assert call("chart", store, *arguments) == 2
    printed = capsys.readouterr()
    assert message in printed.err
    assert "Traceback" not in printed.err
    assert printed.out == ""
    assert sorted(path.name for path in tmp_path.iterdir()) == ["own.duckdb"]


def test_a_failure_on_the_way_leaves_what_was_there(
    store: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    kept = tmp_path / "f.svg"
    kept.write_text("before", encoding="utf-8")
    (tmp_path / "f.csv").mkdir()
    assert call("chart", store, "windows", "-o", tmp_path / "f", "--format", "svg,csv") == 2
    assert kept.read_text(encoding="utf-8") == "before"
    (tmp_path / "f.csv").rmdir()

    def broken(_: object) -> bytes:
        raise InputFault(chart_files.Fault("pdf", "cannot be drawn"))

    monkeypatch.setitem(FORMATS, "pdf", broken)
    assert call("chart", store, "windows", "-o", tmp_path / "f", "--format", "svg,pdf") == 2
    assert kept.read_text(encoding="utf-8") == "before"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["f.svg", "own.duckdb"]


def test_a_store_that_is_missing_or_none(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert call("chart", tmp_path / "none.duckdb", "windows") == 2
    assert "there is no store here" in capsys.readouterr().err
    (tmp_path / "text.duckdb").write_text("no store", encoding="utf-8")
    assert call("chart", tmp_path / "text.duckdb", "windows") == 5
    assert call("chart") == 2


@pytest.mark.parametrize(
    ("output", "formats", "expected"),
    [
        (None, (), {"s-windows.svg": "svg"}),
        (None, ("csv", "pdf", "csv"), {"s-windows.csv": "csv", "s-windows.pdf": "pdf"}),
        ("a.PNG", (), {"a.PNG": "png"}),
        ("a.svg", ("pdf",), {"a.pdf": "pdf"}),
        ("a.v2", ("svg",), {"a.v2.svg": "svg"}),
        ("a", ("all",), {f"a.{form}": form for form in FORMATS}),
    ],
)
def test_which_files_are_meant(
    output: str | None, formats: tuple[str, ...], expected: dict[str, str]
) -> None:
    found = targets(None if output is None else Path(output), formats, Path("s-windows"))
    assert {str(path): form for path, form in found.items()} == expected


def test_texts_cannot_run_as_formulas() -> None:
    frame = pd.DataFrame(
        {
            "choice": ["=1+1", "+x", "-4", "@a", "\ttab", "plain", None, 'a "quoted", one'],
            "rows": range(8),
            "share": [0.1, None, 0.25, 1 / 3, 0.0, 1.0, 2.0, -3.5],
            "flag": [True, False, None, True, True, False, True, False],
            "day": pd.to_datetime(["2001-02-03"] * 8),
        }
    )
    rows = list(csv.reader(frame_csv(frame).splitlines()))
    assert rows[0] == ["choice", "rows", "share", "flag", "day"]
    assert [row[0] for row in rows[1:]] == [
        "'=1+1", "'+x", "'-4", "'@a", "'\ttab", "plain", "", 'a "quoted", one',
    ]  # fmt: skip
    assert [row[2] for row in rows[1:4]] == ["0.1", "", "0.25"]
    assert float(rows[4][2]) == 1 / 3
    assert [row[3] for row in rows[1:4]] == ["true", "false", ""]
    assert rows[1][4] == "2001-02-03"
    assert rows[8][2] == "-3.5"


def test_python_saves_what_the_command_writes(
    results: Results, store: Path, tmp_path: Path
) -> None:
    assert call("chart", store, "directions", "-o", tmp_path / "command.svg") == 0
    (made,) = results.save_chart("directions", tmp_path / "python.svg")
    assert made.read_bytes() == (tmp_path / "command.svg").read_bytes()
    with pytest.raises(InputFault, match="no width"):
        results.chart("directions", width="broad")
    assert results.chart("two-axes", axes=("window", "lags")).to_dict()["title"]
