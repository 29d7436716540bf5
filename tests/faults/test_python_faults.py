"""What a caller gets wrong in Python: one clear fault, as on the command line."""

from __future__ import annotations

from pathlib import Path

import pytest
import small_plans

import sweep
from sweep.errors import InputFault
from sweep.results import Results


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    folder = tmp_path_factory.mktemp("python")
    return sweep.run(small_plans.write_plan(folder, "[axes]\nlags = [1, 2]"), jobs=1)


@pytest.mark.parametrize(
    ("asked", "message"),
    [
        ({"columns": ["foo"]}, 'columns: "foo" is no column of outcomes; known: sweep, finding,'),
        ({"columns": ["p_valu", "lags"]},
         'columns: "p_valu" is no column of outcomes; did you mean "p_value"?'),
        ({"columns": []}, "columns: no column is named."),
        ({"columns": "p_value"},
         'columns: a list of names is needed, not one text. Write ["p_value"].'),
        ({"where": "foo = 1"}, "where: The query cannot be answered: Binder Error: "),
        ({"where": "lags ="}, "where: The query cannot be answered: Parser Error: "),
        ({"where": "1 = 1); DROP TABLE outcome"}, "where: The condition "),
        ({"where": "reason"}, "where: The query cannot be answered: "),
    ],
)  # fmt: skip
def test_outcomes_that_cannot_be_had(
    results: Results, asked: dict[str, object], message: str
) -> None:
    with pytest.raises(InputFault) as caught:
        results.outcomes(**asked)  # type: ignore[arg-type]
    assert str(caught.value).startswith(message)
    assert len(results.outcomes(["lags", "p_value"], "lags = 2")) == 1


@pytest.mark.parametrize("jobs", [0, -1, 1.5, "2", True])
def test_no_number_of_workers(tmp_path: Path, jobs: object) -> None:
    plan = small_plans.write_plan(tmp_path)
    for verb in (sweep.run, sweep.check):
        with pytest.raises(InputFault, match=r"jobs: .* is no number of workers. Give 1 or more."):
            verb(plan, jobs=jobs)  # type: ignore[operator]
    assert not plan.with_suffix(".duckdb").exists()
