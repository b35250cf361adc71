"""A folder for a history, and no memory shared with whatever runs on this machine."""

import os
import tempfile
from pathlib import Path

import pytest

from diskwatch import places
from diskwatch.history.writer import History
from tests.history.examples import NOON, a_drive, a_place


@pytest.fixture(autouse=True)
def _own_run_folder(monkeypatch, tmp_path):
    monkeypatch.setattr(places, "SYSTEM_RUN", tmp_path / "run")


@pytest.fixture
def folder(tmp_path):
    """Where a history may lie: in memory where that can be had, for every commit waits for its disk."""
    memory = Path("/dev/shm")  # noqa: S108  # the folder made in it is this test's alone
    if not os.access(memory, os.W_OK):
        yield tmp_path / "state"
        return
    with tempfile.TemporaryDirectory(dir=memory, prefix="diskwatch-test-") as made:
        yield Path(made) / "state"


@pytest.fixture
def history():
    with History.in_memory() as found:
        yield found


@pytest.fixture
def known(history):
    return history.admit(a_drive(), a_place(), NOON)


@pytest.fixture
def rows(history):
    return lambda sql: history._db.conn.execute(sql).fetchall()
