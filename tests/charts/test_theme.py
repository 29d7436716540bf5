"""The palette, seen with reduced colour vision and without colour."""

import itertools

import numpy as np
import pytest

from sweep.charts import theme

# Machado, Oliveira & Fernandes (2009), severity 1.0, linear RGB.
VISION = {
    "full": np.eye(3),
    "protanopia": np.array(
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ]
    ),
    "deuteranopia": np.array(
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ]
    ),
    "tritanopia": np.array(
        [
            [1.255528, -0.076749, -0.178779],
            [-0.078411, 0.930809, 0.147602],
            [0.004733, 0.691367, 0.303900],
        ]
    ),
}
TO_XYZ = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
WHITE = TO_XYZ @ np.ones(3)


def linear(colour):
    values = np.array([int(colour[at : at + 2], 16) for at in (1, 3, 5)]) / 255
    return np.where(values <= 0.04045, values / 12.92, ((values + 0.055) / 1.055) ** 2.4)


def lab(colour, vision="full"):
    xyz = TO_XYZ @ np.clip(VISION[vision] @ linear(colour), 0, 1) / WHITE
    f = np.where(xyz > (6 / 29) ** 3, np.cbrt(xyz), xyz / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def luminance(colour):
    return float(np.array([0.2126, 0.7152, 0.0722]) @ linear(colour))


def contrast(one, other):
    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


@pytest.mark.parametrize("vision", VISION)
def test_meanings_stay_apart_for_every_viewer(vision):
    marks = (theme.SURVIVES, theme.FAILS, theme.SCREENED, theme.INK)
    for one, other in itertools.combinations(marks, 2):
        distance = np.linalg.norm(lab(one, vision) - lab(other, vision))
        assert distance > 20, (one, other, distance)


def test_survives_and_does_not_differ_in_greyscale():
    light = {
        name: lab(colour)[0]
        for name, colour in {
            "survives": theme.SURVIVES,
            "fails": theme.FAILS,
            "screened": theme.SCREENED,
        }.items()
    }
    assert light["fails"] - light["survives"] > 25
    assert light["screened"] - light["fails"] > 15


DIRECTIONS = (theme.ONE_WAY, theme.REVERSE, theme.BOTH_WAYS, theme.NEITHER, theme.UNDETERMINED)


@pytest.mark.parametrize("vision", VISION)
def test_directions_stay_apart_and_are_not_taken_for_survival(vision):
    for one, other in itertools.combinations(DIRECTIONS, 2):
        assert np.linalg.norm(lab(one, vision) - lab(other, vision)) > 9, (one, other)
    for one in DIRECTIONS:
        for other in (theme.SURVIVES, theme.FAILS):
            assert np.linalg.norm(lab(one, vision) - lab(other, vision)) > 15, (one, other)


def test_neighbouring_directions_differ_in_greyscale():
    # The last one has an outline, so that white beside the palest is told apart.
    light = [lab(colour)[0] for colour in DIRECTIONS[:-1]]
    assert all(abs(a - b) > 18 for a, b in itertools.pairwise(light))
    for fill in (theme.ONE_WAY, theme.BOTH_WAYS):
        assert contrast(fill, "#ffffff") > 4.5
    for fill in (theme.REVERSE, theme.NEITHER):
        assert contrast(fill, theme.INK) > 4.5


def test_counts_on_tints_can_be_read():
    from sweep.charts.two_axes import _DARK

    for share in np.linspace(0, 1, 101):
        ink = "#ffffff" if share > _DARK else theme.INK
        assert contrast(theme.tint(float(share)), ink) > 3.4


def test_tints_darken_steadily_with_the_share():
    light = [lab(theme.tint(share))[0] for share in np.linspace(0, 1, 21)]
    steps = -np.diff(light)
    assert (steps > 0.5).all()
    assert light[0] - light[-1] > 45


def test_text_can_be_read():
    assert contrast(theme.INK, "#ffffff") > 7
    assert contrast(theme.QUIET, "#ffffff") > 4.5
    assert contrast(theme.SURVIVES, "#ffffff") > 3
    assert contrast(theme.ABSENT, "#ffffff") > 3


def test_print_widths_and_type_sizes():
    assert (theme.WIDTHS["narrow"] + 2 * theme.EDGE) / 96 * 25.4 == pytest.approx(85, abs=0.2)
    assert (theme.WIDTHS["wide"] + 2 * theme.EDGE) / 96 * 25.4 == pytest.approx(175, abs=0.2)
    for size in (theme.TITLE, theme.BODY, theme.SMALL):
        assert 7 <= size * 72 / 96 <= 9 + 1e-9
