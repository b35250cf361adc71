import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.history import private
from diskwatch.history.private import connect_to_copy
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from tests.history.examples import NOON, a_drive, a_place


@pytest.fixture
def path(folder):
    """A history with a log beside it, as a watch leaves it that was killed."""
    path = folder / HISTORY
    with History.open(folder) as history:
        history.admit(a_drive(), a_place(), NOON)
        left = {ending: path.with_name(path.name + ending).read_bytes() for ending in ("", "-wal")}
    for ending, content in left.items():
        path.with_name(path.name + ending).write_bytes(content)
    return path


@pytest.fixture(autouse=True)
def memory(monkeypatch, tmp_path):
    (tmp_path / "memory").mkdir()
    monkeypatch.setattr(private, "_MEMORY", tmp_path / "memory")
    return tmp_path / "memory"


def test_the_copy_holds_what_stands_in_the_log_and_nobody_finds_it_by_name(path, memory):
    found = connect_to_copy(path)
    assert found is not None
    assert list(memory.iterdir()) == []
    with closing(found) as connection:
        assert connection.execute("SELECT count(*) FROM drive").fetchone() == (1,)
        with pytest.raises(sqlite3.Error):
            connection.execute("DELETE FROM drive")


def test_without_room_no_copy_is_made(path, memory, monkeypatch):
    monkeypatch.setattr(private, "_ROOM", 1e12)
    assert connect_to_copy(path) is None
    monkeypatch.setattr(private, "_MEMORY", Path("/nowhere/at/all"))
    assert connect_to_copy(path) is None
    assert list(memory.iterdir()) == []


def test_of_what_is_no_history_nothing_is_left(path, memory):
    path.write_bytes(b"no database" * 100)
    path.with_name(f"{path.name}-wal").write_bytes(b"")
    with pytest.raises(sqlite3.Error):
        connect_to_copy(path)
    assert list(memory.iterdir()) == []
