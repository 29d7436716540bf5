from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from store_samples import Filled, fill

import store.database
from store.database import Database
from store.write import SweepWriter


@pytest.fixture
def db(tmp_path: Path) -> Iterator[Database]:
    with store.database.create(tmp_path / "x.duckdb", threads=1) as database:
        yield database


@pytest.fixture
def writer(db: Database) -> SweepWriter:
    return SweepWriter(db)


@pytest.fixture(scope="module")
def filled(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Filled]:
    path = tmp_path_factory.mktemp("filled") / "filled.duckdb"
    with store.database.create(path, threads=1) as database:
        yield fill(database, seed=3)
