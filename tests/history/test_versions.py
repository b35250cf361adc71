import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.errors import HistoryError, HistoryTooNew
from diskwatch.history import versions
from diskwatch.history.versions import Age, age

PATH = Path("/invented/history.db")


@pytest.fixture
def empty():
    with closing(sqlite3.connect(":memory:")) as connection:
        yield connection


@pytest.fixture
def ours(history):
    return history._db.conn


def test_a_database_without_tables_is_empty(empty):
    assert age(empty, PATH) is Age.EMPTY


def test_a_start_cut_short_before_its_first_step_left_an_empty_history(empty):
    empty.execute("CREATE TABLE _sqlite_migrations (id INTEGER, migration_set TEXT, name TEXT)")
    assert age(empty, PATH) is Age.EMPTY


def test_a_history_with_all_steps_is_current(ours):
    assert age(ours, PATH) is Age.CURRENT


def test_a_history_that_lacks_a_step_is_older(ours, monkeypatch):
    monkeypatch.setattr(versions, "MIGRATIONS", (*versions.MIGRATIONS, "9999_invented"))
    assert age(ours, PATH) is Age.OLDER


def test_a_step_that_we_do_not_know_means_a_newer_version(ours):
    ours.execute(
        "INSERT INTO _sqlite_migrations (migration_set, name, applied_at) VALUES ('diskwatch', '9999_x', '')"
    )
    with pytest.raises(HistoryTooNew, match=r"history\.db was written by a newer version"):
        age(ours, PATH)


def test_steps_of_another_set_are_not_our_business(ours):
    ours.execute(
        "INSERT INTO _sqlite_migrations (migration_set, name, applied_at) VALUES ('other', '9999_x', '')"
    )
    assert age(ours, PATH) is Age.CURRENT


def test_a_version_number_above_ours_means_a_newer_version(ours):
    ours.execute("PRAGMA user_version = 99")
    with pytest.raises(HistoryTooNew):
        age(ours, PATH)


@pytest.mark.parametrize(
    "statement", ["CREATE TABLE somebody_elses (x)", "PRAGMA user_version = 3", "PRAGMA application_id = 7"]
)
def test_a_database_of_something_else_is_refused_but_not_called_newer(empty, statement):
    empty.execute(statement)
    with pytest.raises(HistoryError, match="no history of diskwatch") as caught:
        age(empty, PATH)
    assert not isinstance(caught.value, HistoryTooNew)
