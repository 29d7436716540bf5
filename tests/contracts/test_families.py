"""Every member of a family is documented, named as registered, and runs."""

from __future__ import annotations

from importlib import import_module
from pathlib import Path

import click
import numpy as np
import pytest
import small_plans

import sweep
from sweep.charts import CHARTS, chart
from sweep.cli import COMMANDS
from sweep.panel.deterministics import TERM_FAMILIES, TermContext
from sweep.panel.transforms import TRANSFORMS
from sweep.panel.windows import WINDOW_FAMILIES
from sweep.plan.build import procedure_choice
from sweep.plan.choices import ProcedureChoice
from sweep.procedures import PROCEDURES, Evidence
from sweep.report.tables import TABLES
from sweep.results import Results
from sweep.screens import SCREENS


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> Results:
    folder = tmp_path_factory.mktemp("families")
    tail = '[axes]\nlags = [1, 2, "AIC"]\nwindows = ["full sample", { rolling = 80, step = 10 }]'
    return sweep.run(small_plans.write_plan(folder, tail), jobs=1)


@pytest.mark.parametrize("name", PROCEDURES)
def test_procedure(name: str) -> None:
    procedure = PROCEDURES[name]
    assert name == procedure.NAME
    assert procedure.NEEDS in {"moments", "rows", "draws", "path"}
    assert procedure.NULL
    assert procedure.REFERENCE
    assert procedure.__doc__
    evidence = Evidence(
        np.array([1.0, 0.0]), np.array([2.0, 2.0]), np.array([100, 100]), 7, 3, {}
    )
    choice = procedure_choice(name)
    assert procedure.applies(choice) is None
    found = procedure.compute(evidence, choice)
    assert found.value[0] > 0
    assert 0 < found.p_value[0] < 0.001
    assert found.p_value[1] == 1.0
    assert found.df_num == 3


def test_the_four_dresses_are_ordered() -> None:
    """LM < LR < Wald with divisor T wherever the cause explains anything."""
    rng = np.random.default_rng(1)
    evidence = Evidence(
        rng.exponential(size=200), rng.exponential(size=200), np.full(200, 90), 9, 4, {}
    )
    value = {
        name: PROCEDURES[name].compute(
            evidence, ProcedureChoice("", {}, statistic=name, divisor="T")
        ).value
        for name in ("LM", "LR", "Wald")
    }
    assert (value["LM"] < value["LR"]).all()
    assert (value["LR"] < value["Wald"]).all()


def test_screens_have_bits_of_their_own() -> None:
    assert len({screen.BIT for screen in SCREENS.values()}) == len(SCREENS)
    for name, screen in SCREENS.items():
        assert name == screen.NAME
        assert screen.WORDS
        passed = screen.passes(np.array([1, 1000]), 10)
        assert passed.tolist() == [False, True]


@pytest.mark.parametrize("name", TRANSFORMS)
def test_transformation(name: str) -> None:
    transform = TRANSFORMS[name]
    assert transform.name == name
    assert transform.unit_words
    values = np.exp(np.cumsum(np.random.default_rng(2).standard_normal((2, 200)) * 0.02, axis=1))
    together = transform.apply(values, "quarterly")
    apart = np.stack([transform.apply(row, "quarterly") for row in values])
    np.testing.assert_allclose(together, apart, rtol=1e-9, atol=1e-12)
    lost = transform.offsets("quarterly")[-1]
    assert np.isfinite(together[:, lost:]).all()


@pytest.mark.parametrize("name", TERM_FAMILIES)
def test_deterministic_term(name: str) -> None:
    context = TermContext(np.arange(48), np.arange(48) % 12, 12, 23.5, 23.5, 48.0)
    column = TERM_FAMILIES[name](5 if name in ("season", "step", "pulse") else 1, context)
    assert column.shape == (48,)
    assert np.isfinite(column.astype(float)).all()
    assert (np.ptp(column.astype(float)) > 0) == (name != "constant")


@pytest.mark.parametrize("name", WINDOW_FAMILIES)
def test_window_family(name: str) -> None:
    first, last = WINDOW_FAMILIES[name](3, 60, 20, 4)
    assert first.size == last.size > 0
    assert (first >= 3).all()
    assert (last <= 60).all()
    assert (last - first + 1 >= 20).all()


@pytest.mark.parametrize("name", CHARTS)
def test_chart(name: str, results: Results) -> None:
    assert name == chart(name).NAME
    assert chart(name).QUESTION.endswith("?")
    assert results.chart(name).to_dict()["title"]


@pytest.mark.parametrize("name", TABLES)
def test_table(name: str, results: Results) -> None:
    table = results.table(name)
    assert table.name == name
    assert table.title


@pytest.mark.parametrize("name", COMMANDS)
def test_command(name: str) -> None:
    command = import_module(f"sweep.cli.{name}").command
    assert command.help
    assert all(item.help for item in command.params if isinstance(item, click.Option))
    assert (Path(sweep.__file__).parent / "cli" / f"{name}.py").exists()
