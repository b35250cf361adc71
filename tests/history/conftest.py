"""A folder for a history, and no memory shared with whatever runs on this machine."""

import pytest

from diskwatch import places
from diskwatch.history.writer import History


@pytest.fixture(autouse=True)
def _own_run_folder(monkeypatch, tmp_path):
    monkeypatch.setattr(places, "SYSTEM_RUN", tmp_path / "run")


@pytest.fixture
def folder(tmp_path):
    return tmp_path / "state"


@pytest.fixture
def history():
    with History.in_memory() as found:
        yield found
