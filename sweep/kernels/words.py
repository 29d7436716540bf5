"""64-bit words that stand for the rows a regression uses."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from sweep.kernels.layout import Ints

__all__ = ["Words", "mix", "row_word", "row_words"]

Words = NDArray[np.uint64]


def mix(words: Words) -> Words:
    """Scramble 64-bit words one to one (the finaliser of SplitMix64, Steele et al. 2014)."""
    with np.errstate(over="ignore"):
        words = (words ^ (words >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
        words = (words ^ (words >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
        return words ^ (words >> np.uint64(31))


def row_words(first: Ints, last: Ints) -> Words:
    """Digest the rows from ``first`` to ``last``, each shape (w,), none left out between."""
    with np.errstate(over="ignore"):
        words = mix(first.astype(np.uint64) + np.uint64(0x9E3779B97F4A7C15))
        return mix(words + mix(last.astype(np.uint64) + np.uint64(0xD1B54A32D192ED03)))


def row_word(rows: Ints) -> np.uint64:
    """Digest ascending rows, shape (t,); as :func:`row_words` does where none is left out."""
    if not rows.size:
        return np.uint64(0)
    word = row_words(rows[:1], rows[-1:])
    if rows.size != rows[-1] - rows[0] + 1:
        held = mix(rows.astype(np.uint64) + np.uint64(0x9E3779B97F4A7C15))
        word = mix(word ^ held.sum(dtype=np.uint64, keepdims=True))
    return np.uint64(word[0])
