import pytest

from sweep.verdicts.reproduction import compare, rounding

BASELINE = {
    "status": "ok",
    "reason": None,
    "statistic": 3.4217,
    "p_value": 0.00934,
    "observations": 355,
}


def finding(statistic=None, p_value=None, observations=None, tolerance=None):
    return {
        "reported_statistic": statistic,
        "reported_p_value": p_value,
        "reported_observations": observations,
        "reported_tolerance": tolerance,
    }


@pytest.mark.parametrize(
    ("reported", "expected"),
    [
        (finding("3.42"), True),
        (finding("3.42", "0.009", 355), True),
        (finding("3.42", "0.0093"), True),
        (finding("3.42", "0.0094"), False),
        (finding("3.4"), True),
        (finding("3"), True),
        (finding("3.420"), False),
        (finding("3.421"), False),
        (finding("3.421", tolerance=0.001), True),
        # A tolerance takes the place of the rounding, also where it is the narrower one.
        (finding("3.42", tolerance=0.0005), False),
        (finding("3.50"), False),
        (finding("3.50", tolerance=0.1), True),
        (finding("3.42", "0.02"), False),
        (finding("3.42", observations=354), False),
        (finding(), None),
    ],
)
def test_reproduced_or_not(reported, expected):
    assert compare(BASELINE, reported).reproduced is expected


@pytest.mark.parametrize(
    ("printed", "computed", "expected"),
    [
        ("0.00001", 0.0000096, True),
        ("0.00001", 0.001, False),  # a hundred times as large
        ("0.0001", 0.000149, True),
        ("0.0001", 0.0003, False),
        ("1e-9", 1.4e-9, True),
        ("1e-9", 1e-7, False),
        ("2.81e-12", 2.8076e-12, True),
        ("2.81e-12", 2.9e-12, False),
        ("0.000", 0.0004, True),
        ("0.000", 0.0006, False),
        ("0.0125", 0.01245, True),  # half a unit exactly
        ("0.0125", 0.01255, True),
        ("0.0125", 0.012551, False),
    ],
)
def test_small_p_values_agree_in_their_printed_digits(printed, computed, expected):
    found = compare(BASELINE | {"p_value": computed}, finding(p_value=printed))
    assert found.reproduced is expected
    assert f"p-value {printed.replace('-', '−')} reported" in found.sentence


def test_difference_is_stated():
    sentence = compare(BASELINE, finding("3.5", observations=355, tolerance=0.005)).sentence
    assert "does not reproduce" in sentence
    assert "statistic 3.5 reported, 3.42170 computed (off by −0.0783, allowed 0.005)" in sentence
    assert "observations 355 reported, 355 computed" in sentence


def test_agreement_and_absence_are_said():
    sentence = compare(BASELINE, finding("3.42")).sentence
    assert "The baseline reproduces the reported numbers" in sentence
    assert "was not checked" in compare(BASELINE, finding()).sentence


def test_a_baseline_that_could_not_be_run():
    failed = BASELINE | {"status": "infeasible", "reason": "too few rows", "statistic": None}
    found = compare(failed, finding("3.42"))
    assert found.reproduced is False
    assert "infeasible: too few rows" in found.sentence


def test_tiny_p_values_are_not_written_as_nought():
    tiny = BASELINE | {"p_value": 2.5e-8}
    assert "2.50e−08 computed" in compare(tiny, finding(p_value="0.04")).sentence


@pytest.mark.parametrize(
    ("value", "half"),
    [("3.42", 0.005), ("0.0330", 0.00005), ("4", 0.5), ("4.0", 0.05), ("1e-7", 5e-8)],
)
def test_rounding(value, half):
    assert rounding(value) == pytest.approx(half)
