"""Fixtures that several folders share."""

from __future__ import annotations

import counted_frames
import pytest


@pytest.fixture(scope="session")
def sweeps():
    """The builder of synthetic sweeps and their counted frames."""
    return counted_frames
