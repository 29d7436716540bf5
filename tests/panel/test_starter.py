"""The starter plan: recognised, valid as it stands, careful, and clear where it cannot be."""

from __future__ import annotations

import re
import tomllib
from datetime import date, timedelta

import numpy as np
import openpyxl
import pytest

import sweep
from sweep.errors import InputFault
from sweep.panel.calendar import FREQUENCIES, advance, build_calendar, period_label
from sweep.panel.load import read_dataset
from sweep.panel.starter import starter_plan
from sweep.panel.survey import _LEAST_FREE, _PER_COEFFICIENT, rows_needed
from sweep.plan.document import PlanDocument
from sweep.screens.enough_observations import FREEDOM, PER_REGRESSOR, passes

NAMES = ("rents", "freight", "diesel", "rail", "ice", "tide")


def columns(n, width=4, seed=3):
    steps = np.random.default_rng(seed).standard_normal((n, width))
    return 50.0 + 0.1 * np.cumsum(steps, axis=0)


def labels(frequency, n):
    first = date(1990, 1, 1)
    return [period_label(advance(first, frequency, i), frequency) for i in range(n)]


def write(path, dates, values, names=NAMES, date_name="when"):
    head = ",".join([date_name, *names[: values.shape[1]]])
    rows = [",".join([day, *map(str, row)]) for day, row in zip(dates, values, strict=True)]
    path.write_text("\n".join([head, *rows, ""]))
    return path


def plan_of(path):
    text = starter_plan(path)
    plan = tomllib.loads(text)
    PlanDocument.model_validate(plan)
    return text, plan


def message_of(path):
    with pytest.raises(InputFault) as caught:
        starter_plan(path)
    return str(caught.value)


@pytest.mark.parametrize("frequency", FREQUENCIES)
@pytest.mark.parametrize("n", [36, 80, 400])
def test_every_frequency_and_length_gives_a_plan_its_data_can_carry(tmp_path, frequency, n):
    path = write(tmp_path / "harbour.csv", labels(frequency, n), columns(n))
    text, plan = plan_of(path)
    assert plan["data"] == {
        "file": "harbour.csv",
        "date": "when",
        "frequency": frequency,
        "source": "Say here where the data come from",
    }
    (finding,) = plan["findings"]
    assert (finding["effect"], finding["cause"]) == ("rents", "freight")
    assert finding["given"] == ["diesel", "rail"]
    assert finding["claim"] == "leads"
    data = read_dataset(path, "when", frequency, ["rents", "freight", *finding["given"]])
    for window in plan["axes"]["windows"][1:]:
        if "rolling" in window:
            assert rows_needed(4, 2) <= window["rolling"] <= 0.75 * n
            assert (n - window["rolling"]) // window["step"] + 1 <= 31
        else:
            first = data.calendar.find(window["from"], "first") if "from" in window else 0
            last = data.calendar.find(window["until"], "last") if "until" in window else n - 1
            assert last - first + 1 in {n // 2, n - n // 2}
    assert all(n >= rows_needed(4, lag) for lag in plan["axes"]["lags"] if isinstance(lag, int))
    assert 1 in plan["axes"]["lags"]
    assert "PUT YOUR OWN FINDING HERE" in text


def test_only_what_this_version_can_do_is_proposed(tmp_path):
    _, plan = plan_of(write(tmp_path / "a.csv", labels("monthly", 240), columns(240)))
    assert set(plan) == {
        "title", "significance", "seed", "data", "findings", "baseline", "axes", "rule_out",
        "screens", "sweep",
    }  # fmt: skip
    assert plan["screens"] == {"require": ["enough observations"]}
    assert plan["axes"]["tests"] == ["F", {"test": "F", "covariance": "HC3"}]


def test_rows_needed_are_those_that_the_screen_asks_for():
    assert (_LEAST_FREE, _PER_COEFFICIENT) == (FREEDOM, PER_REGRESSOR)
    for series in (2, 3, 5):
        for lags in (1, 4, 12):
            rows, regressors = rows_needed(series, lags) - 1 - lags, 2 + series * lags
            passed = passes(np.array([rows - 1, rows]), regressors)
            assert passed.tolist() == [False, True]


def test_every_default_has_its_reason(tmp_path):
    text, _ = plan_of(write(tmp_path / "a.csv", labels("quarterly", 160), columns(160)))
    lines = text.splitlines()
    for key in ("lags", "deterministics", "windows", "transformations", "tests", "conditioning"):
        place = max(i for i, line in enumerate(lines) if line.startswith(f"{key} ="))
        assert lines[place - 1].startswith("#"), key
    assert max(len(line) for line in lines if line.startswith("#")) <= 100
    for words in (
        "Ivanov & Kilian 2005", "MacKinnon & White 1985", "Lütkepohl 1982", "Toda & Phillips 1993"
    ):  # fmt: skip
        assert words in text
    assert text.count("common practice, no source") >= 5


def test_what_is_commented_out_can_be_taken_in(tmp_path):
    """An episode and a regime, with dates inside the sample; a level shift is shown too."""
    path = write(tmp_path / "a.csv", labels("quarterly", 160), columns(160))
    text, plan = plan_of(path)
    taken = text.replace("    # {", "    {")
    more = tomllib.loads(taken)["axes"]["windows"]
    assert len(more) == len(plan["axes"]["windows"]) + 2
    step = re.search(r'steps = \["(.+)"\]', text)
    assert step is not None
    taken = taken.replace('"linear trend"', f'{{ trend = "constant", steps = ["{step[1]}"] }}', 1)
    (tmp_path / "more.toml").write_text(taken, encoding="utf-8")
    checked = sweep.check(tmp_path / "more.toml")
    assert checked.planned > 1000


def test_the_baseline_belongs_to_its_axes(tmp_path):
    values = columns(160)
    values[5, 2] = -1.0
    _, plan = plan_of(write(tmp_path / "a.csv", labels("quarterly", 160), values))
    for singular, plural in (
        ("lags", "lags"), ("deterministics", "deterministics"), ("window", "windows"),
        ("transformation", "transformations"), ("test", "tests"),
    ):  # fmt: skip
        axis = plan["axes"][plural]
        assert plan["baseline"][singular] in axis
        assert all(axis.count(entry) == 1 for entry in axis)


def scales(entry):
    """Return the transformation of each series."""
    if isinstance(entry, str):
        return dict.fromkeys(NAMES[:4], entry)
    return dict.fromkeys(NAMES[:4], entry["default"]) | entry["series"]


def test_each_series_gets_the_scale_that_is_usual_for_it(tmp_path):
    """An index number, a rate in per cent, a series around zero, and one that does not wander."""
    noise = np.random.default_rng(5).standard_normal((200, 4))
    values = np.cumsum(noise, axis=0)
    values[:, 0] = 100.0 * np.exp(0.01 * values[:, 0])
    values[:, 1] = 6.0 + 0.1 * (values[:, 1] - values[:, 1].min())
    values[:, 3] = noise[:, 3]
    path = write(tmp_path / "a.csv", labels("monthly", 200), values)
    _, plan = plan_of(path)
    first, growth, plain, yearly = plan["axes"]["transformations"]
    assert scales(first) == {
        "rents": "log difference", "freight": "difference", "diesel": "difference",
        "rail": "level",
    }  # fmt: skip
    assert plan["baseline"]["transformation"] == first
    assert scales(growth)["freight"] == "log difference"
    assert scales(growth)["rail"] == scales(plain)["rents"] == "difference"
    assert scales(yearly) == {
        "rents": "yearly growth", "freight": "yearly growth", "diesel": "seasonal difference",
        "rail": "seasonal difference",
    }  # fmt: skip
    (rule,) = plan["rule_out"]
    assert rule["when"] == {"transformation": [yearly["name"]], "lags": [1, 2, 3, 6, 9]}


def test_no_logs_where_values_are_not_positive(tmp_path):
    path = write(tmp_path / "a.csv", labels("monthly", 240), columns(240) - 100.0)
    _, plan = plan_of(path)
    assert plan["axes"]["transformations"] == ["difference", "seasonal difference"]


def test_a_seasonal_pattern_is_found_and_put_first(tmp_path):
    values = columns(160)
    plain = write(tmp_path / "plain.csv", labels("quarterly", 160), values)
    text, plan = plan_of(plain)
    assert plan["baseline"]["deterministics"] == "constant"
    assert "no pattern was found" in text
    values[:, 1] += np.tile([0.5, -0.2, 0.1, -0.4], 40)
    text, plan = plan_of(write(tmp_path / "a.csv", labels("quarterly", 160), values))
    assert plan["baseline"]["deterministics"] == {"trend": "constant", "seasonal": True}
    assert plan["axes"]["deterministics"][0] == plan["baseline"]["deterministics"]
    assert "constant" in plan["axes"]["deterministics"]
    assert "seasonal patterns (F test of the changes, 0.1%): freight" in text


def test_a_second_measure_is_not_given(tmp_path):
    values = columns(160)
    values[:, 2] = 7.0 * values[:, 1] + 0.1 * np.random.default_rng(8).standard_normal(160)
    text, plan = plan_of(write(tmp_path / "a.csv", labels("monthly", 160), values))
    assert plan["findings"][0]["given"] == ["rail"]
    assert '# measures = { "freight" = ["freight", "diesel"] }' in text
    path = tmp_path / "a.toml"
    path.write_text(text.replace("# measures", "measures"), encoding="utf-8")
    assert sweep.check(path).planned > 1000


@pytest.mark.parametrize(
    ("width", "given", "conditioning"),
    [
        (2, [], None),
        (3, ["diesel"], ["given", "pairwise"]),
        (6, ["diesel", "rail", "ice"], ["given", "pairwise", "leave one out"]),
    ],
)
def test_conditioning_fits_the_given_series(tmp_path, width, given, conditioning):
    path = write(tmp_path / "a.csv", labels("monthly", 160), columns(160, width))
    _, plan = plan_of(path)
    assert plan["findings"][0]["given"] == given
    assert plan["axes"].get("conditioning") == conditioning


def test_a_short_sample_gets_fewer_given_series(tmp_path):
    n = rows_needed(3, 1)
    _, plan = plan_of(write(tmp_path / "a.csv", labels("annual", n), columns(n)))
    assert plan["findings"][0]["given"] == ["diesel"]
    assert plan["axes"]["lags"] == [1, "AIC", "BIC", "HQ"]
    assert plan["axes"]["windows"] == ["full sample"]


@pytest.mark.parametrize(
    ("frequency", "n", "rule"),
    [("monthly", 300, "AIC"), ("quarterly", 100, "BIC"), ("quarterly", 160, "HQ")],
)
def test_the_lag_rule_suits_the_sample(tmp_path, frequency, n, rule):
    _, plan = plan_of(write(tmp_path / "a.csv", labels(frequency, n), columns(n)))
    assert plan["baseline"]["lags"] == rule


def test_unusable_columns_are_passed_over_with_the_reason(tmp_path):
    n = 120
    values = columns(n, 6)
    table = {
        "row": range(1, n + 1),
        "when": labels("monthly", n),
        "year": [label[:4] for label in labels("monthly", n)],
        "note": ["high\tly"] * n,
        "fixed": [4] * n,
        "holed": [*values[:50, 4], "", *values[51:, 4]],
        "rents": values[:, 0],
        "twice": 2 * values[:, 0],
        "freight": values[:, 1],
    }
    rows = [",".join(map(str, row)) for row in zip(*table.values(), strict=True)]
    path = tmp_path / "a.csv"
    path.write_text("\n".join([",".join(table), *rows, ""]))
    text, plan = plan_of(path)
    assert plan["findings"][0]["effect"] == "rents"
    assert plan["findings"][0]["cause"] == "freight"
    assert plan["findings"][0]["given"] == []
    for passed in (
        "row (it only counts time)", "year (it only counts time)",
        "note (“high ly” is not a number)",
        "fixed (the series is constant: every value is 4)",
        "holed (a value is missing inside the sample: 1994-03)",
        "twice (perfectly collinear with rents)",
    ):  # fmt: skip
        assert f"# Passed over: {passed}" in text


def test_names_are_quoted_whatever_is_in_them(tmp_path):
    names = ('the "rents", €\\m²', "[freight]", "# diesel", "rail = 1")
    values = columns(160)
    values[0, 2] = -3.0
    path = tmp_path / 'my "data".csv'
    heads = ['"' + name.replace('"', '""') + '"' for name in names]
    write(path, labels("monthly", 160), values, names=heads, date_name="the month")
    _, plan = plan_of(path)
    (finding,) = plan["findings"]
    assert (finding["effect"], finding["cause"], *finding["given"]) == names
    assert plan["data"]["file"] == path.name
    assert plan["baseline"]["transformation"]["series"] == {"# diesel": "level"}


def test_holidays_make_the_calendar_observed(tmp_path):
    days = [day for i, day in enumerate(labels("business daily", 300)) if i % 40 != 17]
    _, plan = plan_of(write(tmp_path / "a.csv", days, columns(len(days))))
    assert plan["data"]["frequency"] == "business daily"
    assert plan["data"]["calendar"] == "as observed"


def test_halves_count_rows_that_all_series_share(tmp_path):
    values = columns(200).astype(object)
    values[:40, 1] = ""
    path = write(tmp_path / "a.csv", labels("monthly", 200), values)
    _, plan = plan_of(path)
    calendar = build_calendar("monthly", [date(1990 + i // 12, i % 12 + 1, 1) for i in range(200)])
    assert plan["axes"]["windows"][1]["until"] == calendar.label(119)
    assert plan["axes"]["windows"][2]["from"] == calendar.label(120)


def test_an_excel_file(tmp_path):
    book = openpyxl.Workbook()
    book.active.append(["year", "rents", "freight"])
    for i, row in enumerate(columns(60, 2)):
        book.active.append([1950 + i, *map(float, row)])
    book.save(tmp_path / "a.xlsx")
    _, plan = plan_of(tmp_path / "a.xlsx")
    assert plan["data"]["date"] == "year"
    assert plan["data"]["frequency"] == "annual"


# -- what cannot be recognised ------------------------------------------------------------


def test_no_dates(tmp_path):
    path = write(tmp_path / "a.csv", [f"row {i}" for i in range(60)], columns(60))
    message = message_of(path)
    assert "no column was recognised as dates" in message
    assert "1990-Q1" in message


def test_year_and_quarter_in_two_columns(tmp_path):
    n = 80
    values = np.column_stack([np.arange(n) % 4 + 1, columns(n, 2)])
    years = [str(1990 + i // 4) for i in range(n)]
    message = message_of(write(tmp_path / "a.csv", years, values, names=("quarter", *NAMES)))
    assert "column when repeat" in message
    assert "join them into one, as in 1990-Q1" in message


def test_dates_without_a_frequency(tmp_path):
    days = [(date(1990, 1, 1) + timedelta(days=i * i)).isoformat() for i in range(60)]
    message = message_of(write(tmp_path / "a.csv", days, columns(60)))
    assert "column when: the frequency of the dates was not recognised" in message
    assert "quarterly" in message


def test_a_gap_is_named(tmp_path):
    days = labels("monthly", 61)
    del days[20]
    assert "a row is missing: 1991-09" in message_of(write(tmp_path / "a.csv", days, columns(60)))


def test_one_series_is_not_enough(tmp_path):
    message = message_of(write(tmp_path / "a.csv", labels("monthly", 60), columns(60, 1)))
    assert "a finding needs two" in message


def test_too_few_rows(tmp_path):
    n = rows_needed(2, 1) - 1
    message = message_of(write(tmp_path / "a.csv", labels("annual", n), columns(n)))
    assert f"only {n} rows hold all of rents, freight" in message
    assert f"At least {n + 1}" in message


def test_a_faulty_file_is_refused(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("when;rents\n1990;1\n1991;2\n")
    assert "semicolons" in message_of(path)
