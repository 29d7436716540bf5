"""The legend of the tints, in place."""

from __future__ import annotations

from . import marks
from .marks import Layers
from .theme import QUIET, TINTS, tint

__all__ = ["tint_legend"]

_SWATCH = 16.0


def tint_legend(height: float, across: float) -> Layers:
    """Explain the tints of shares by swatches from 0% to 100%, flush right at the top."""
    step = 1.0 / (len(TINTS) - 1)
    start = across - 32 - _SWATCH * len(TINTS)
    layers: Layers = []
    for number in range(len(TINTS)):
        box = [{"y": 2, "y2": 12, "fill": tint(number * step)}]
        left = start + number * _SWATCH
        layers += marks.areas(box, height, left, left + _SWATCH)
    words = [{"y": 7, "text": "share surviving  0%"}]
    layers += marks.texts(words, height, start - 5, align="right", colour=QUIET)
    right = start + _SWATCH * len(TINTS) + 4
    return layers + marks.texts([{"y": 7, "text": "100%"}], height, right, colour=QUIET)
