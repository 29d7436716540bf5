"""Measurements are collected only when they are asked for: ``pytest -m bench tests/bench -s``."""

from __future__ import annotations

from pathlib import Path

import pytest


def pytest_collect_file(file_path: Path, parent: pytest.Collector) -> pytest.Module | None:
    asked = "bench" in (parent.config.option.markexpr or "")
    given = parent.session.isinitpath(file_path)  # named on the command line: collected anyway
    if asked and not given and file_path.suffix == ".py" and file_path.name.startswith("bench_"):
        return pytest.Module.from_parent(parent, path=file_path)
    return None
