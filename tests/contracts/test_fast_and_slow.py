"""Every kind of choice there is: the fast path against least squares on the rows.

Tolerance: statistics, sums and errors agree to a relative 2e-8.  The fast path promises 1e-8
against QR on the rows; the slow path (a singular value decomposition of raw rows) has an error
of its own of that size in the worst conditioned of these regressions.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import small_plans

from sweep.engine.compute import compute_task
from sweep.engine.group import make_tasks
from sweep.engine.prepare import Prepared, prepare
from sweep.engine.reasons import Reason
from sweep.engine.recheck import recheck
from sweep.engine.task import ROW_FIELDS
from sweep.plan.load import load_plan

TOLERANCE = 2e-8
TAIL = """
[axes]
lags = [
  1, { order = 2, sample = { common = 6 } }, { own = 4, cause = 2 },
  { own = 3, cause = 5, given = 1 },
  "HQ", "FPE", "sequential LR", { criterion = "AIC", maximum = 5, scope = "equation" },
  { criterion = "BIC", maximum = 4, sample = { common = 7 } },
]
deterministics = [
  "none", "constant", "linear trend", "quadratic trend",
  { trend = "linear trend", seasonal = true },
  { trend = "none", seasonal = true }, { trend = "constant", fourier = 2 },
  { trend = "constant", steps = ["1996-01"], pulses = ["1997-03"] },
]
windows = [
  "full sample", { without = [["1993-03", "1993-05"], ["1999-01", "1999-02"]] },
  { split = "1996-06" },
  { rolling = 90, step = 9 }, { rolling = 100, step = 13, without = ["1996-01", "1996-02"] },
  { expanding = 80, step = 17 }, { shrinking = 90, step = 13 }, { drop_first = 0.2 },
  { drop_last = 0.1, from = "1991" },
]
transformations = [
  "level", "log", "difference", "log difference", "yearly growth", "seasonal difference",
  "inverse hyperbolic sine", "linearly detrended", "Hodrick-Prescott cycle", "Hamilton cycle",
  { default = "difference", series = { z = "Hamilton cycle", x = "yearly growth" } },
]
tests = [
  "F", "Wald", "LR", "LM", { test = "Wald", divisor = "T" }, { test = "F", covariance = "HC0" },
  { test = "F", covariance = "HC1" }, { test = "Wald", covariance = "HC2" },
  { test = "F", covariance = "HC3" }, { test = "lag augmented", extra_lags = 2 },
  { test = "lag augmented", form = "Wald", covariance = "HC1" },
  { test = "F", covariance = "HAC", bandwidth = 4 },
  { test = "Wald", covariance = "HAC", bandwidth = "Newey-West", small_sample = true },
  { test = "F", covariance = "HAC", bandwidth = "Andrews", kernel = "quadratic spectral" },
]
conditioning = ["given", "pairwise"]
measures = { x = ["x", { series = "w", inverted = true }] }
"""
EXOGENOUS = 'exogenous = [{ series = "v", lags = 3 }]'


@pytest.fixture(scope="module")
def prepared(tmp_path_factory: pytest.TempPathFactory) -> Prepared:
    folder = tmp_path_factory.mktemp("broad")
    return prepare(load_plan(small_plans.write_plan(folder, TAIL, EXOGENOUS)))


@pytest.mark.parametrize("seed", range(4))
def test_a_random_sample_agrees(prepared: Prepared, seed: int) -> None:
    rng = np.random.default_rng(seed)
    rows = np.sort(rng.choice(prepared.rows.count, 250, replace=False))
    nothing = np.zeros(prepared.rows.count, bool)
    outcomes = [compute_task(task) for task in make_tasks(prepared, rows, nothing)]
    order = np.argsort(np.concatenate([o.row for o in outcomes]))
    found = {n: np.concatenate([getattr(o, n) for o in outcomes])[order] for n in ROW_FIELDS}
    compared = 0
    for place, row in enumerate(rows.tolist()):
        if found["status"][place] or found["reverse_status"][place]:
            assert found["reason"][place] != Reason.NONE
            assert found["reason"][place] != Reason.NO_NUMBER
            continue
        slow = recheck(prepared, row)
        assert slow.forward.orders[1] == found["order_used"][place]
        assert slow.forward.fit.observations == found["observations"][place]
        expected = {
            "statistic": slow.forward.statistic,
            "coefficient_sum_se": slow.forward.coefficient_sum_error,
            "reverse_statistic": slow.reverse.statistic,
        }
        for name, value in expected.items():
            assert found[name][place] == pytest.approx(value, rel=TOLERANCE), (row, name)
        scale = slow.forward.coefficient_sum_error
        assert found["coefficient_sum"][place] == pytest.approx(
            slow.forward.coefficient_sum, rel=TOLERANCE, abs=TOLERANCE * scale
        )
        # A p-value far in the tail magnifies the statistic's error by about its own log.
        assert found["p_value"][place] == pytest.approx(slow.forward.p_value, rel=2e-6)
        compared += 1
    assert compared > 150


def test_rows_without_numbers_have_one_of_the_known_reasons(prepared: Prepared) -> None:
    """A step outside its window and a filter across an episode are reasons, not numbers."""
    rng = np.random.default_rng(9)
    rows = np.sort(rng.choice(prepared.rows.count, 1500, replace=False))
    nothing = np.zeros(prepared.rows.count, bool)
    outcomes = [compute_task(task) for task in make_tasks(prepared, rows, nothing)]
    reasons = set(np.concatenate([o.reason for o in outcomes]).tolist())
    assert {Reason.TERM, Reason.FILTER_EPISODE} <= reasons
    assert Reason.NO_NUMBER not in reasons


def test_equal_computations_share_a_digest(tmp_path: Path) -> None:
    """A criterion that chooses two lags computes what two fixed lags compute."""
    plan = load_plan(
        small_plans.write_plan(tmp_path, '[axes]\nlags = [1, 2, 3, "AIC", "BIC", "HQ"]')
    )
    whole = prepare(plan)
    rows = np.arange(whole.rows.count)
    (task,) = make_tasks(whole, rows, np.zeros(rows.size, bool))
    outcome = compute_task(task)
    by_order: dict[int, set[int]] = {}
    for order, digest in zip(outcome.order_used, outcome.computation, strict=True):
        by_order.setdefault(int(order), set()).add(int(digest))
    assert all(len(digests) == 1 for digests in by_order.values())
    assert len(set().union(*by_order.values())) == len(by_order)
