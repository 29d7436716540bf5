"""Fixtures that several folders share."""

from __future__ import annotations

import counted_frames
import pytest

# Doctests are looked for in every file; conftest files of several folders share one name.
collect_ignore_glob = ["*conftest.py"]


@pytest.fixture(scope="session")
def sweeps():
    """The builder of synthetic sweeps and their counted frames."""
    return counted_frames
