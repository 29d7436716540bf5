"""The lag augmented test against numbers of R and statsmodels, and its size on random walks.

The Wald statistics of German inflation (Dp) and the long rate (R), 1972Q2 to 1998Q4, are R's
(base R least squares, block of the first p lags in a regression with p + 1 lags; R 4.2.2,
1 December 2026).  The data are Lütkepohl's, as the statsmodels package carries them (BSD
licence).  Tolerance: both are double precision; R's own rounding on levels with a trend and
seasonal terms is the larger part (for Dp → R with three lags its 3.73753818490785 is 2.7e-9 off
the value in long double, 3.73753817490792), so 5e-9.
"""

from __future__ import annotations

from importlib.resources import files
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
import statsmodels.api as sm

import sweep

RELATIVE = 5e-9
DETERMINISTICS = {
    "n": '"none"',
    "c": '"constant"',
    "cs": '{ trend = "constant", seasonal = true }',
    "ct": '"linear trend"',
    "cts": '{ trend = "linear trend", seasonal = true }',
}
# Deterministic terms, p, rows T, and for R → Dp and Dp → R: Wald with divisor T − k and T.
R_VALUES = [
    ("n", 3, 103, 8.94988776401961, 9.70356252309495, 1.52928190775063, 1.65806354208752),
    ("n", 4, 102, 12.1818252934294, 13.5059367383673, 3.15868413770883, 3.50201937006848),
    ("c", 3, 103, 11.4412358356353, 12.53667330926, 4.75593020319727, 5.21128522265233),
    ("c", 4, 102, 13.626898338088, 15.2741058295053, 5.1323178682822, 5.75270794027236),
    ("cs", 3, 103, 11.264152324965, 12.7495350491362, 5.5936199651371, 6.33124018032002),
    ("cs", 4, 102, 12.1867616351854, 14.1255646226012, 2.57916088234847, 2.989481931813),
    ("ct", 3, 103, 9.79248612283495, 10.845441619914, 2.26154787951566, 2.50472507086144),
    ("ct", 4, 102, 11.9432566577674, 13.535690878803, 3.53851869814943, 4.01032119123602),
    ("cts", 3, 103, 9.57715998621168, 10.9605275397756, 3.73753818490785, 4.27740480017232),
    ("cts", 4, 102, 10.3267179388703, 12.1071865490203, 1.52845172758044, 1.79197788750811),
]
HEAD = """
title = "augmented"
[data]
file = "data.csv"
date = "date"
frequency = "quarterly"
"""


def write(folder: Path, frame: pd.DataFrame, first: str, body: str) -> Path:
    frame = frame.copy()
    frame.insert(0, "date", pd.period_range(first, periods=len(frame), freq="Q").astype(str))
    frame.to_csv(folder / "data.csv", index=False)
    path = folder / "plan.toml"
    path.write_text(HEAD + body, encoding="utf-8")
    return path


@pytest.fixture(scope="module")
def german(tmp_path_factory: pytest.TempPathFactory) -> pd.DataFrame:
    """Both directions of every R value, through the public verbs."""
    path = files("statsmodels.tsa.vector_ar.tests.results") / "e6.dat"
    text = path.read_text(encoding="utf-8").split("*/", 1)[1]
    rows = [line.split() for line in text.splitlines() if line.strip()]
    start = next(i for i, row in enumerate(rows) if _numbers(row))
    frame = pd.DataFrame([[float(x) for x in row] for row in rows[start:]], columns=["Dp", "R"])
    assert len(frame) == 107
    body = f"""
[[findings]]
name = "rate"
cause = "R"
effect = "Dp"
[baseline]
lags = 3
deterministics = "constant"
transformation = "level"
test = {{ test = "lag augmented", form = "Wald" }}
[axes]
lags = [3, 4]
deterministics = [{", ".join(DETERMINISTICS.values())}]
tests = [{{ test = "lag augmented", form = "Wald" }},
         {{ test = "lag augmented", form = "Wald", divisor = "T" }}, {{ test = "lag augmented" }}]
"""
    plan = write(tmp_path_factory.mktemp("e6"), frame, "1972Q2", body)
    return sweep.run(plan, jobs=1).outcomes()


def _numbers(row: list[str]) -> bool:
    try:
        return len([float(item) for item in row]) == 2
    except ValueError:
        return False


@pytest.mark.parametrize("case", R_VALUES, ids=lambda case: f"{case[0]}{case[1]}")
def test_wald_agrees_with_r(german: pd.DataFrame, case: tuple[float, ...]) -> None:
    terms, order, rows, adjusted, plain, reverse_adjusted, reverse_plain = case
    label = {"n": "none", "c": "constant", "cs": "constant + seasonal", "ct": "linear trend",
             "cts": "linear trend + seasonal"}[str(terms)]  # fmt: skip
    own = german[
        (german["deterministics"].astype(str) == label)
        & (german["lags_choice"].astype(str) == str(order))
    ]
    own = own.set_index(own["test"].astype(str))
    wald = own.loc["lag augmented by 1, Wald"]
    ratio = own.loc["lag augmented by 1, Wald, divisor T"]
    form = own.loc["lag augmented by 1"]
    assert wald["observations"] == rows
    assert (wald["lags"], wald["df_num"]) == (order, order)
    np.testing.assert_allclose(wald["statistic"], adjusted, rtol=RELATIVE)
    np.testing.assert_allclose(wald["reverse_statistic"], reverse_adjusted, rtol=RELATIVE)
    np.testing.assert_allclose(ratio["statistic"], plain, rtol=RELATIVE)
    np.testing.assert_allclose(ratio["reverse_statistic"], reverse_plain, rtol=RELATIVE)
    np.testing.assert_allclose(form["statistic"] * order, adjusted, rtol=RELATIVE)
    # k follows from the two divisors: (T − k)/T is the ratio of the two Wald statistics.
    assert form["df_den"] == round(adjusted / plain * rows)


# Logs of US real GDP, consumption and investment, 1959Q1 to 2009Q3 (statsmodels' macrodata,
# public domain): Wald with divisor T − k; the first two also from R's dynlm, the others from
# one throw-away least-squares script, printed to six decimals.
MACRO = [
    (2, 1, "constant", 37.598424, 1.116754, 200),
    (2, 1, "linear trend", 36.616311, 1.185960, 200),
    (4, 1, "constant", 41.101169, 2.442719, 198),
    (2, 2, "constant", 35.763434, 1.207789, 199),
]


def test_three_series_in_logs(tmp_path: Path) -> None:
    data = sm.datasets.macrodata.load_pandas().data
    frame = data[["realgdp", "realcons", "realinv"]].set_axis(["gdp", "cons", "inv"], axis=1)
    body = """
[[findings]]
name = "consumption"
cause = "cons"
effect = "gdp"
given = ["inv"]
[[findings]]
name = "investment"
cause = "inv"
effect = "gdp"
given = ["cons"]
[baseline]
lags = 2
transformation = "log"
test = { test = "lag augmented", form = "Wald" }
[axes]
lags = [2, 4]
deterministics = ["constant", "linear trend"]
transformations = ["log", "log difference", { default = "log", series = { inv = "difference" } }]
tests = [{ test = "lag augmented", form = "Wald" },
         { test = "lag augmented", form = "Wald", extra_lags = 2 }]
"""
    results = sweep.run(write(tmp_path, frame, "1959Q1", body), jobs=1)
    rows = results.outcomes()
    names = ("finding", "lags_choice", "deterministics", "test", "transformation")
    text = rows.astype(dict.fromkeys(names, str))
    for order, extra, terms, consumption, investment, count in MACRO:
        for name, value in (("consumption", consumption), ("investment", investment)):
            (one,) = text[
                (text["finding"] == name) & (text["lags_choice"] == str(order))
                & (text["deterministics"] == terms) & (text["transformation"] == "log")
                & (text["test"] == f"lag augmented by {extra}, Wald")
            ].to_dict("records")  # fmt: skip
            # Six printed decimals.
            assert one["statistic"] == pytest.approx(value, abs=6e-7)
            assert one["observations"] == count
    changed = text[text["transformation"] != "log"]
    assert set(changed["status"]) == {"not applicable"}
    assert set(changed["reverse_status"]) == {"not applicable"}
    assert changed["reason"].str.contains("levels or logarithms").all()
    checked = sweep.check(tmp_path / "plan.toml")
    assert sum(item.specifications for item in checked.ruled_out) == len(changed)


def test_augmented_and_plain_tests_are_two_groups(tmp_path: Path) -> None:
    frame = pd.DataFrame(np.random.default_rng(1).standard_normal((90, 2)), columns=["x", "y"])
    body = """
[[findings]]
name = "f"
cause = "x"
effect = "y"
[baseline]
lags = 2
transformation = "level"
[axes]
tests = ["F", "LR", { test = "lag augmented" }]
"""
    rows = sweep.run(write(tmp_path, frame, "1959Q1", body), jobs=1).outcomes()
    weights = dict(zip(rows["test"].astype(str), rows["weight"], strict=True))
    assert weights == {"F": 0.5, "LR": 0.5, "lag augmented by 1": 1.0}
    assert rows["computation"].nunique() == 3


WALKS = 600


@pytest.mark.slow
def test_size_on_random_walks(tmp_path: Path) -> None:
    """Independent random walks, T = 100, two lags: naive F in levels over-rejects, this does not.

    Simulated elsewhere with 4,000 replications: F in levels 13.3%, lag augmented F 6.1%.  Both
    directions of each pair count, so there are 1,200 nearly independent tests; the bounds are
    3.5 standard errors of the difference of the two simulations.
    """
    rng = np.random.default_rng(20260401)
    walks = rng.standard_normal((100, 2 * WALKS)).cumsum(axis=0)
    names = [f"{letter}{pair}" for pair in range(WALKS) for letter in "xy"]
    findings = "".join(
        f'[[findings]]\nname = "pair {pair}"\ncause = "x{pair}"\neffect = "y{pair}"\n'
        for pair in range(WALKS)
    )
    body = f"""
{findings}
[baseline]
lags = 2
transformation = "level"
[axes]
tests = ["F", {{ test = "lag augmented" }}]
"""
    frame = pd.DataFrame(walks, columns=names)
    rows = sweep.run(write(tmp_path, frame, "1959Q1", body), jobs=1).outcomes(
        ["test", "p_value", "reverse_p_value"]
    )
    for test, published in (("F", 0.133), ("lag augmented by 1", 0.061)):
        own = rows[rows["test"].astype(str) == test]
        values = np.concatenate([own["p_value"], own["reverse_p_value"]]).astype(float)
        rate = (values <= 0.05).mean()
        spread = np.sqrt(published * (1 - published) * (1 / (2 * WALKS) + 1 / 4000))
        assert abs(rate - published) < 3.5 * spread, (test, rate)
