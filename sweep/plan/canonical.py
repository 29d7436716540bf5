"""Identity: what a choice, a finding and a specification mean, as 128-bit tokens.

A token is BLAKE2b-128 of the axis, a NUL and the canonical JSON of the meaning.  A
specification's id is the sum of its tokens, each 64-bit half modulo 2⁶⁴, so reordering the
plan, adding choices and adding axes (whose neutral choice has token 0) leave ids alone.
"""

from __future__ import annotations

import json
from collections.abc import Iterable
from hashlib import blake2b
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["NEUTRAL", "Token", "add_tokens", "digest_text", "hex_id", "position_tokens", "token"]

Token = tuple[int, int]

# The neutral choice of each axis is fixed for ever; it is not the plan's baseline.
NEUTRAL: dict[str, dict[str, Any]] = {
    "lags": {"order": 1},
    "deterministics": {"trend": "constant"},
    "window": {},
    "transformation": {"default": "level"},
    "test": {"statistic": "F"},
    "conditioning": {"set": "given"},
    "measures": {},
}
_WRAP = 2**64


def canonical_json(meaning: Any) -> str:
    """Return JSON with sorted keys, no spaces and characters written as themselves."""
    return json.dumps(
        meaning, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False
    )


def digest_text(text: str) -> Token:
    """Return BLAKE2b-128 of a text as (high, low) unsigned 64-bit halves."""
    raw = blake2b(text.encode(), digest_size=16).digest()
    return int.from_bytes(raw[:8], "big"), int.from_bytes(raw[8:], "big")


def token(axis: str, meaning: dict[str, Any]) -> Token:
    """Return the token of a choice; (0, 0) for the axis's registered neutral.

    Examples
    --------
    >>> token("lags", {"order": 1})
    (0, 0)
    """
    if NEUTRAL.get(axis) == meaning:
        return (0, 0)
    return digest_text(f"{axis}\0{canonical_json(meaning)}")


def position_tokens(labels: Iterable[tuple[str, str]]) -> list[Token]:
    """Return the tokens of moving-window positions, each named by its first and last period."""
    return [digest_text(f"position\0{first}\0{last}") for first, last in labels]


def add_tokens(*parts: Token) -> Token:
    """Add tokens, each half modulo 2⁶⁴."""
    return sum(p[0] for p in parts) % _WRAP, sum(p[1] for p in parts) % _WRAP


def halves(tokens: list[Token]) -> tuple[NDArray[np.uint64], NDArray[np.uint64]]:
    """Return a list of tokens as two arrays of unsigned integers."""
    return (
        np.array([t[0] for t in tokens], dtype=np.uint64),
        np.array([t[1] for t in tokens], dtype=np.uint64),
    )


def hex_id(high: int, low: int) -> str:
    """Return an id as 32 hexadecimal digits.

    Examples
    --------
    >>> hex_id(1, 255)
    '000000000000000100000000000000ff'
    """
    return f"{high:016x}{low:016x}"
