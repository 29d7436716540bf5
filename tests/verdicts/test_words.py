import math

import pandas as pd
import pytest

from sweep.verdicts import words


@pytest.mark.parametrize(
    ("share", "expected"),
    [
        (0.0, "0%"),
        (1e-9, "<1%"),
        (0.00999, "<1%"),
        (0.01, "1%"),
        (0.5, "50%"),
        (0.625, "63%"),
        (0.99, "99%"),
        (0.9901, ">99%"),
        (1 - 1e-12, ">99%"),
        (1.0, "100%"),
        (None, "–"),
        (math.nan, "–"),
    ],
)
def test_a_share_is_never_rounded_to_none_or_all(share, expected):
    assert words.percent(share) == expected


@pytest.mark.parametrize("count", [1, 2, 3, 7, 50, 199, 200, 201, 1000, 10**6])
def test_only_exact_counts_give_none_or_all(count):
    for survived in {0, 1, count // 2, count - 1, count}:
        text = words.percent(survived / count)
        assert (text == "0%") == (survived == 0)
        assert (text == "100%") == (survived == count)


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (0.0, "<0.001"),
        (1e-300, "<0.001"),
        (0.0009999, "<0.001"),
        (0.001, "0.001"),
        (0.04951, "0.050"),
        (0.9994, "0.999"),
        (0.99951, ">0.999"),
        (1.0, "1.000"),
        (None, "–"),
        (pd.NA, "–"),
        (pd.NaT, "–"),
    ],
)
def test_a_p_value_is_never_written_as_nought(value, expected):
    assert words.p_text(value) == expected


def test_shares_stand_beside_their_counts():
    assert words.share_text(18, 24) == "18 of 24 (75%)"
    assert words.share_text(999, 1000) == "999 of 1,000 (>99%)"
    assert words.share_text(0, 0) == "none admissible"


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (0.5, "0.500"),
        (99.95, "100"),
        (-0.001234, "−0.00123"),
        (123456.0, "123,456"),
        (math.nan, "–"),
    ],
)
def test_numbers_keep_three_digits(value, expected):
    assert words.number(value) == expected


def test_sentences_count_and_join():
    assert words.counted(1, "single change") == "1 single change"
    assert words.counted(12, "single change") == "12 single changes"
    assert words.joined([]) == ""
    assert words.joined(["a", "b"]) == "a and b"
    assert words.reason_text("infeasible", None) == "infeasible"
    assert words.reason_text("infeasible", "too few") == "infeasible: too few"
    assert words.period_text(pd.Timestamp("2009-01-01")) == "2009-01-01"
