"""The shipped notebook: kept without outputs, and run from its first cell to its last."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
from pathlib import Path

import nbformat
import pytest

import sweep

NOTEBOOK = Path(__file__).parents[2] / "configs" / "harbour.ipynb"
RUNNER = Path(__file__).with_name("run_notebook.py")


def read() -> nbformat.NotebookNode:
    return nbformat.read(NOTEBOOK, as_version=4)


def test_it_is_kept_without_outputs() -> None:
    notebook = read()
    nbformat.validate(notebook)
    for cell in notebook.cells:
        if cell.cell_type == "code":
            assert cell.outputs == []
            assert cell.execution_count is None
    assert set(notebook.metadata) == {"kernelspec", "language_info"}
    text = NOTEBOOK.read_text(encoding="utf-8")
    assert not re.findall(r"(?<![\w.])/(?:home|work|tmp|root|Users)\b|https?://", text)


def test_its_code_parses_and_calls_what_there_is() -> None:
    code = "\n".join(cell.source for cell in read().cells if cell.cell_type == "code")
    called = {
        node.func.attr
        for node in ast.walk(ast.parse(code))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute)
    }
    verbs = {"new", "load_plan", "check", "run", "chart", "table", "survival", "explain", "verify",
             "report", "export", "query", "compare", "frame"}  # fmt: skip
    assert called == verbs | {"read_text", "write_text"}


@pytest.mark.slow
def test_it_runs(tmp_path: Path) -> None:
    """Cell by cell; figures are pictures, nothing is fetched, and the findings are the truth's."""
    command = [sys.executable, str(RUNNER), str(NOTEBOOK), str(tmp_path)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    notebook = nbformat.read(tmp_path / NOTEBOOK.name, as_version=4)
    shown = [
        output for cell in notebook.cells if cell.cell_type == "code" for output in cell.outputs
    ]
    assert not [output for output in shown if output.output_type == "error"]
    assert not [output for output in shown if output.get("name") == "stderr"]
    data = [output.data for output in shown if "data" in output]
    pictures = [one for one in data if "image/svg+xml" in one]
    assert len(pictures) == 3
    assert all("image/png" in one for one in pictures)
    page = "".join(one.get("text/html", "") for one in data)
    assert "every stored value came out again" in page
    assert not re.findall(r"<script|https?://|<link|<img", page)
    printed = "".join(output.text for output in shown if output.output_type == "stream")
    told = re.search(r"computed now: ([\d,]+); there before: ([\d,]+)", printed)
    assert told is not None
    new, before = (int(count.replace(",", "")) for count in told.groups())
    assert 0 < new < before

    folder = tmp_path / "harbour_notebook"
    windows = sweep.open_results(folder / "harbour.duckdb", 1).survival("window", 0)
    share = windows.set_index("choice")["headline_share"]
    assert share["until 2010-12"] > 0.9 > 0.6 > share["from 2011-01"]
    assert (folder / "harbour.html").stat().st_size > 100_000
    assert (folder / "results" / "outcomes.csv").exists()
    paths = sweep.open_results(folder / "windows.duckdb").compare().frame("episodes")
    assert set(paths["window_name"]) == {"8 years", "10 years", "15 years"}
