# ruff: noqa: E501 - a table of messages is read one fault a line
"""Faults of a plan, one a row: one clear message with its place, exit code 2, nothing written."""

from __future__ import annotations

from pathlib import Path

import pytest
import small_plans

from sweep.cli import main
from sweep.errors import InputFault
from sweep.plan.load import load_plan

# What follows the baseline's first two keys, what is in the finding, and the message.
FAULTS: dict[str, tuple[str, str, str]] = {
    "unknown key": ("[axis]\nlags = [1]", "", 'axis: unknown key "axis"; did you mean "axes"?'),
    "unknown key inside": ("[axes]\nwindow = [1]", "", 'axes.window: unknown key "window"; did you mean "windows"?'),
    "unknown name": ('[axes]\ntests = ["f"]', "", 'axes.tests[1]: "f" is not known here; did you mean "F"?'),
    "wrong type": ('[axes]\nlags = 4', "", "axes.lags: a list in [brackets] is needed here, not a number."),
    "not a lag": ("[axes]\nlags = [0]", "", "axes.lags[1]: 0 is not a lag order; orders start at 1."),
    "empty axis": ("[axes]\ntests = []", "", "axes.tests: an empty list leaves nothing to run. Give at least one choice."),
    "duplicate lags": ('[axes]\nlags = ["AIC", { criterion = "AIC", maximum = 12 }]', "", 'axes.lags[2]: "AIC" means the same as "AIC". Leave one of them out.'),
    "duplicate names": ('[axes]\nwindows = [{ name = "a", from = "1992" }, { name = "a", until = "2000" }]', "", 'axes.windows: two choices carry the name "a". Give each its own name.'),
    "common too small": ("[axes]\nlags = [{ order = 5, sample = { common = 3 } }]", "", "axes.lags[1]: the common order 3 is smaller than the lags; raise it to 5 or more."),
    "criterion without maximum": ('[axes]\nlags = [{ criterion = "AIC", sample = { common = 3 } }]', "", 'axes.lags[1]: a criterion on a common sample needs its own "maximum".'),
    "moving baseline": ("window = { rolling = 60 }", "", "baseline.window: the baseline is one specification, and a moving window is many. Choose a fixed window."),
    "split baseline": ('window = { split = "1995-01" }', "", "baseline.window: a split names two windows; the baseline is one."),
    "two moving": ("[axes]\nwindows = [{ rolling = 60, expanding = 60 }]", "", 'axes.windows[1]: give one of "rolling", "expanding" and "shrinking".'),
    "bad date": ('[axes]\nwindows = [{ from = "soon" }]', "", "axes.windows[1]: “soon” is not a date that can be read; write it as 1990, 1990-Q1, 1990-03 or 1990-03-15."),
    "episode reversed": ('[axes]\nwindows = [{ without = ["1999-01", "1998-01"] }]', "", "axes.windows[1]: the episode ends (1998-01) before it starts (1999-01)."),
    "date outside": ('[axes]\nwindows = [{ from = "2030-01" }]', "", 'axes.windows: "from 2030-01": 2030-01 lies outside the sample (1990-01 to 2003-04).'),
    "rolling too long": ("[axes]\nwindows = [{ rolling = 400 }]", "", 'axes.windows: "rolling 400": a window of 400 periods is longer than the sample (160 periods, 1990-01 to 2003-04).'),
    "window too short": ("[axes]\nwindows = [{ rolling = 6 }]", "", 'axes.windows: "rolling 6" has 6 periods, fewer than the smallest regression of "x leads y" needs. Lengthen it or use fewer lags.'),
    "lags too long": ("[axes]\nlags = [60]", "", 'axes.lags: "60" lags leave no degree of freedom in the longest window of "x leads y" (160 periods). Use fewer lags or longer windows.'),
    "requested lags too long": ('[[requests]]\nname = "a"\naxes = { lags = [90] }', "", 'requests[1].axes.lags: "90" lags leave no degree of freedom in the longest window of "x leads y" (160 periods). Use fewer lags or longer windows.'),
    "level of another criterion": ('[axes]\nlags = [{ criterion = "AIC", level = 0.1 }]', "", 'axes.lags[1]: "level" goes with the criterion "sequential LR".'),
    "level of an order": ('[axes]\nlags = [{ order = 3, level = 0.1 }]', "", 'axes.lags[1]: "level" goes with the criterion "sequential LR".'),
    "horizon too long": ('[axes]\ntransformations = [{ default = "Hamilton cycle", horizon = 136 }]', "", 'axes.transformations: "Hamilton cycle, horizon 136" needs 161 periods for its regression, and the longest window has 160. Shorten the horizon or use longer windows.'),
    "unknown screen, none like it": ('[screens]\nrequire = ["roots"]', "", 'screens.require[1]: unknown screen "roots"; known: enough observations.'),
    "unknown design": ('[sweep]\ndesign = "random"', "", 'sweep.design: "random" is not a design; known: "full", "one change", "two changes" and { sample = 5000 }.'),
    "mistyped design": ('[sweep]\ndesign = "one chang"', "", 'sweep.design: "one chang" is not a design; did you mean "one change"?'),
    "empty reason": ('[[rule_out]]\nwhen = { lags = [9] }\nbecause = ""', "", "rule_out[1].because: the text is empty. Write something."),
    "given and exogenous": ("", 'exogenous = [{ series = "z" }]', 'findings[1].exogenous: "z" stands under "given" as well. Leave one of them out.'),
    "exogenous twice": ("", 'exogenous = [{ series = "w" }, { series = "w", lags = 2 }]', 'findings[1].exogenous: "w" stands twice. Leave one of them out.'),
    "step outside": ('[axes]\ndeterministics = [{ steps = ["2040-01"] }]', "", 'axes.deterministics: "constant + step 2040-01": 2040-01 lies outside the sample (1990-01 to 2003-04).'),
    "robust LR": ('[axes]\ntests = [{ test = "LR", covariance = "HC3" }]', "", "axes.tests[1]: LR has no form with covariance HC3; use F or Wald."),
    "divisor": ('[axes]\ntests = [{ test = "F", divisor = "T" }]', "", 'axes.tests[1]: divisor = "T" belongs to the classical Wald statistic.'),
    "not yet: calibration": ("[calibration]\ndraws = 99", "", "calibration: not yet available in this version; leave it out."),
    "request without choices": ('[[requests]]\nname = "a"', "", "requests[1].axes: this key is missing. Add it."),
    "request that names nothing": ('[[requests]]\nname = "a"\naxes = {}', "", "requests[1].axes: names no choice. Name at least one."),
    "request with an unknown key": ('[[requests]]\nname = "a"\nby = "b"\naxes = { lags = [3] }', "", 'requests[1].by: unknown key "by"; known: name, from, asks, axes, with, finding.'),
    "request named twice": ('[[requests]]\nname = "a"\naxes = { lags = [3] }\n[[requests]]\nname = "a"\naxes = { lags = [4] }', "", 'requests[2].name: two requests are called "a".'),
    "request with an unknown one": ('[[requests]]\nname = "more lags"\naxes = { lags = [3] }\n[[requests]]\nname = "b"\nwith = ["more lag"]\naxes = { lags = [4] }', "", 'requests[2].with: no earlier request is called "more lag"; did you mean "more lags"?'),
    "request with a later one": ('[[requests]]\nname = "a"\nwith = ["b"]\naxes = { lags = [3] }\n[[requests]]\nname = "b"\naxes = { lags = [4] }', "", 'requests[1].with: no earlier request is called "b". Put it before this one.'),
    "request with itself": ('[[requests]]\nname = "a"\nwith = ["a"]\naxes = { lags = [3] }', "", "requests[1].with: a request cannot be crossed with itself."),
    "request of an unknown finding": ('[[requests]]\nname = "a"\nfinding = "x leads z"\naxes = { lags = [3] }', "", 'requests[1].finding: no finding is called "x leads z"; did you mean "x leads y"?'),
    "request twice the same": ('[[requests]]\nname = "a"\naxes = { lags = [3, 3] }', "", 'requests[1].axes.lags[2]: "3" means the same as "3". Leave one of them out.'),
    "request with a taken name": ('[[requests]]\nname = "a"\naxes = { lags = [{ order = 5, name = "2" }] }', "", 'requests, axis lags: two choices carry the name "2". Give each its own name.'),
    "request of a role of nobody": ('[[requests]]\nname = "a"\naxes = { measures = { q = ["x"] } }', "", "requests[1].axes.measures.q: no finding has this role; known: x, y, z."),
    "request of a bad lag": ('[[requests]]\nname = "a"\naxes = { lags = ["AICC"] }', "", 'requests[1].axes.lags[1]: "AICC" is not a criterion; did you mean "AIC"?'),
    "not yet: error correction": ('[axes]\ntests = [{ test = "error correction" }]', "", 'axes.tests[1]: test "error correction" is not yet available in this version.'),
    "extra lags of nothing": ('[axes]\ntests = [{ test = "F", extra_lags = 1 }]', "", 'axes.tests[1]: "extra_lags" goes with the test "lag augmented".'),
    "augmented LR": ('[axes]\ntests = [{ test = "lag augmented", form = "LR" }]', "", 'axes.tests[1].form: "LR" is not known here; known: F, Wald.'),
    "augmented F with divisor": ('[axes]\ntests = [{ test = "lag augmented", divisor = "T" }]', "", 'axes.tests[1]: divisor = "T" belongs to the classical Wald statistic.'),
    "HAC without bandwidth": ('[axes]\ntests = [{ test = "F", covariance = "HAC" }]', "", 'axes.tests[1]: HAC needs a "bandwidth": a number of periods, for example 4, or the rule "Newey-West" or "Andrews".'),
    "bandwidth of nothing": ('[axes]\ntests = [{ test = "F", covariance = "HC3", bandwidth = 4 }]', "", 'axes.tests[1]: "bandwidth" goes with covariance = "HAC".'),
    "unknown bandwidth rule": ('[axes]\ntests = [{ test = "F", covariance = "HAC", bandwidth = "Andrew" }]', "", 'axes.tests[1].bandwidth: "Andrew" is no rule for a bandwidth; did you mean "Andrews"?'),
    "negative bandwidth": ('[axes]\ntests = [{ test = "F", covariance = "HAC", bandwidth = -1 }]', "", "axes.tests[1].bandwidth: a bandwidth is a number of periods from 0 to 1000."),
    "not yet: bootstrap": ('[axes]\ntests = [{ test = "F", reference = "wild bootstrap" }]', "", 'axes.tests[1].reference: "reference" is not yet available in this version.'),
    "not yet: screen": ('[screens]\nrequire = ["stable roots"]', "", 'screens.require[1]: the screen "stable roots" is not yet available in this version.'),
    "unknown screen": ('[screens]\nrequire = ["enough observation"]', "", 'screens.require[1]: unknown screen "enough observation"; did you mean "enough observations"?'),
    "rule on baseline": ('[[rule_out]]\nwhen = { lags = [2] }\nbecause = "no"', "", 'rule_out[1]: rules out the baseline of "x leads y". Narrow the rule or change the baseline.'),
    "rule on nothing": ('[[rule_out]]\nwhen = { lags = [9] }\nbecause = "no"', "", 'rule_out[1].when.lags[1]: "9" is not among the plan\'s choices. Leave it out of the rule.'),
    "measure of nobody": ('[axes]\nmeasures = { q = ["x"] }', "", "axes.measures.q: no finding has this role; known: x, y, z."),
    "one column twice": ('[axes]\nmeasures = { x = ["x", "z"] }', "", 'axes.measures: the column "z" stands for two roles of "x leads y" at once. Give each role a column of its own.'),
    "unknown column": ("", 'exogenous = [{ series = "vv", lags = 1 }]', "small.csv: there is no column “vv”. Did you mean “v”? The columns are month, x, y, z, w, v."),
    "sign of nothing": ("", 'claim = "does not lead"\nsign = "positive"', 'findings[1]: a sign makes no sense under the claim "does not lead"; leave it out.'),
    "reverse sign": ("", 'reverse_sign = "positive"', 'findings[1]: "reverse_sign" belongs to the claim "leads both ways".'),
    "cause as exogenous": ("", 'exogenous = [{ series = "x" }]', 'findings[1].exogenous: "x" is already the cause or the effect.'),
    "unknown series in scale": ('[axes]\ntransformations = [{ default = "level", series = { q = "log" } }]', "", 'axes.transformations: "level; q: log" names the series "q", which no finding uses; known: x, y, z.'),
    "reported in words": ('[baseline.reported]\np_value = "< 0.01"', "", 'baseline.reported.p_value: a printed number is needed here, such as 3.42, 0.0190 or "0.0190".'),
    "reported not a number": ("[baseline.reported]\nstatistic = nan", "", 'baseline.reported.statistic: a printed number is needed here, such as 3.42, 0.0190 or "0.0190".'),
    "reported no probability": ("[baseline.reported]\np_value = 1.3", "", "baseline.reported.p_value: 1.3 is no probability; a p-value lies between 0 and 1."),
    "reported tolerance": ("[baseline.reported]\nstatistic = 3.1\ntolerance = 0.0", "", "baseline.reported.tolerance: 0.0 is out of range. It should be greater than 0."),
    "reported nothing": ("[baseline.reported]\ntolerance = 0.1", "", "baseline.reported: holds no number. Give a statistic or a p_value."),
    "too many": ("[axes]\nlags = [" + ", ".join(str(n) for n in range(1, 31)) + "]\nwindows = [" + ", ".join(f"{{ rolling = {n} }}" for n in range(100, 152)) + '] \ntransformations = ["level", "log", "difference", "log difference", "yearly growth", "seasonal difference", "inverse hyperbolic sine"]\ndeterministics = ["none", "constant", "linear trend", "quadratic trend", { seasonal = true }]\ntests = ["F", "Wald", "LR", "LM", { test = "F", covariance = "HC0" }, { test = "F", covariance = "HC1" }, { test = "F", covariance = "HC2" }, { test = "F", covariance = "HC3" }]\nconditioning = ["given", "pairwise"]', "", "axes: the full cross has 31,029,600 specifications, more than 20,000,000. Choose fewer, or set [sweep] design = { sample = 5000 }."),
}  # fmt: skip


@pytest.mark.parametrize("name", FAULTS)
def test_one_fault_one_message(
    name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    tail, finding, message = FAULTS[name]
    plan = small_plans.write_plan(tmp_path, tail, finding)
    before = sorted(tmp_path.iterdir())
    with pytest.raises(SystemExit) as left:
        main(["run", str(plan), "--no-report"])
    assert left.value.code == 2
    shown = capsys.readouterr()
    assert shown.err == f"{message}\n"
    assert not shown.out
    assert sorted(tmp_path.iterdir()) == before


@pytest.mark.parametrize("tail", ["", "[axes]\nlags = [1, 2]"])
def test_the_baselines_own_lags_are_named(
    tmp_path: Path, tail: str, capsys: pytest.CaptureFixture[str]
) -> None:
    plan = small_plans.write_plan(tmp_path, tail)
    text = plan.read_text(encoding="utf-8").replace("lags = 2\n", "lags = 500\n")
    plan.write_text(text, encoding="utf-8")
    with pytest.raises(SystemExit) as left:
        main(["check", str(plan)])
    assert left.value.code == 2
    assert 'baseline.lags: "500" lags leave no degree of freedom' in capsys.readouterr().err


def test_a_title_is_not_empty(tmp_path: Path) -> None:
    plan = small_plans.write_plan(tmp_path)
    text = plan.read_text(encoding="utf-8").replace('title = "A small plan"', 'title = ""')
    plan.write_text(text, encoding="utf-8")
    with pytest.raises(InputFault, match=r"^title: the text is empty. Write something.$"):
        load_plan(plan)


def test_a_seed_that_the_store_cannot_hold(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    plan = small_plans.write_plan(tmp_path)
    text = plan.read_text(encoding="utf-8")
    for seed, code in ((2**63, 2), (-1, 2), (2**63 - 1, 0)):
        plan.write_text(f"seed = {seed}\n{text}", encoding="utf-8")
        with pytest.raises(SystemExit) as left:
            main(["run", str(plan), "--no-report", "--quiet"])
        assert (left.value.code or 0) == code
        assert plan.with_suffix(".duckdb").exists() == (code == 0)
        assert capsys.readouterr().err.startswith(f"seed: {seed} is out of range." if code else "")


def test_all_faults_at_once(tmp_path: Path) -> None:
    plan = small_plans.write_plan(
        tmp_path, '[axes]\nlags = [0, "AIK"]\ntests = ["G"]\n[calibration]\ndraws = 9', 'sing = "x"'
    )
    with pytest.raises(InputFault) as caught:
        load_plan(plan)
    places = [fault.place for fault in caught.value.faults]
    assert places == ["findings[1].sing", "axes.lags[1]", "axes.lags[2]", "axes.tests[1]", "calibration"]


@pytest.mark.parametrize(
    ("text", "message"),
    [("title = ", "not valid TOML"), ("", "title: this key is missing. Add it.")],
)
def test_files_that_are_no_plan(tmp_path: Path, text: str, message: str) -> None:
    path = tmp_path / "plan.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputFault, match=message):
        load_plan(path)
    with pytest.raises(InputFault, match="no such plan file"):
        load_plan(tmp_path / "pln.toml")
    with pytest.raises(InputFault, match="a folder"):
        load_plan(tmp_path)
