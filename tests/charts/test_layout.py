import itertools

import pytest

from sweep.charts.layout import shortened, spread_evenly, text_width, wrapped
from sweep.charts.strips import day_number, year_ticks

LONG = "constant_and_linear_trend_with_seasonal_dummies_and_step_2009_01_and_pulse_2020_04"


@pytest.mark.parametrize(
    "text", ["log difference", LONG, "运费指数" * 12, "a" * 200, "", "two  words\n here"]
)
@pytest.mark.parametrize("width", [40, 100, 210])
def test_wrapped_lines_fit_and_keep_every_character(text, width):
    lines = wrapped(text, width)
    assert all(text_width(line) <= width for line in lines)
    assert "".join("".join(lines).split()) == "".join(text.split())


def test_too_many_lines_end_in_an_ellipsis():
    lines = wrapped(LONG, 100, lines=2)
    assert len(lines) == 2
    assert lines[1].endswith("…")
    assert all(text_width(line) <= 100 for line in lines)


def test_shortened_keeps_what_fits():
    assert shortened("short", 100) == "short"
    assert text_width(shortened("much too long a phrase", 50)) <= 50


@pytest.mark.parametrize("count", [1, 5, 44, 300])
@pytest.mark.parametrize("keep", [[], [0], [0, 3, 4]])
def test_even_spread(count, keep):
    keep = [place for place in keep if place < count]
    chosen = spread_evenly(count, 12, keep)
    assert len(chosen) == min(count, 12)
    assert set(keep) <= set(chosen)
    assert chosen == sorted(set(chosen))
    if count > 12:
        gaps = [b - a for a, b in itertools.pairwise(chosen)]
        assert max(gaps) <= 2 * count / (12 - len(keep)) + 1


@pytest.mark.parametrize(
    ("first", "last"),
    [("1900-01-01", "2024-12-01"), ("2020-01-01", "2020-03-01"), ("1983-04-15", "1990-02-11")],
)
@pytest.mark.parametrize("most", [5, 9])
def test_ticks_lie_inside_and_are_few(first, last, most):
    ticks = year_ticks(day_number(first), day_number(last), most)
    assert 1 <= len(ticks) <= most
    assert all(day_number(first) <= day <= day_number(last) for day, _ in ticks)
