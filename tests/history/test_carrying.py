import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from diskwatch.history.beginning import begun
from diskwatch.history.carrying import carry, let_go_of_orphans, tables_of
from diskwatch.history.writer import History
from tests.history.examples import DAY, NOON, a_drive, a_place, full_round


@pytest.fixture
def old(history):
    known = history.admit(a_drive(), a_place(), NOON)
    for number in range(5):
        history.record(full_round(known, NOON + number * DAY, number))
    return history._db.conn


@pytest.fixture
def new(tmp_path):
    with closing(begun(tmp_path / "new.db")) as db:
        db.conn.execute("PRAGMA foreign_keys = OFF")
        yield db.conn


def test_all_rows_come_over_once_however_often_they_are_carried(old, new):
    first = carry(old, new)
    assert first.gaps == {}
    assert first.rows["pass"] == 5
    assert sum(carry(old, new).rows.values()) == 0
    assert let_go_of_orphans(new) == 0


def test_what_the_new_file_has_already_stays(old, new):
    new.execute("INSERT INTO analyser_state (drive, at, packed) VALUES (1, 0, x'00')")
    carry(old, new)
    assert new.execute("SELECT at FROM analyser_state").fetchone() == (0,)


def test_a_pass_whose_explanation_is_lost_stays(old, new):
    old.execute("INSERT INTO sentence VALUES (9, 'It sleeps.')")
    old.execute("INSERT INTO pass VALUES (1, 5, 0, 'asleep', 2, 0, 9, 0)")
    carry(old, new)
    new.execute("DELETE FROM sentence")
    assert let_go_of_orphans(new) == 0
    assert new.execute("SELECT outcome, explanation FROM pass WHERE at = 5").fetchone() == ("asleep", None)


def test_rows_of_an_older_version_come_over_though_their_key_was_shorter(new):
    path = Path(__file__).parents[2] / "fixtures" / "history" / "0002.db"
    with closing(sqlite3.connect(f"{path.as_uri()}?mode=ro&immutable=1", uri=True)) as older:
        found = carry(older, new)
    assert found.gaps == {}
    assert new.execute("SELECT nth, outcome FROM pass").fetchall() == [
        (0, "asleep"),
        (0, "timed-out"),
        (0, "read"),
    ]


def test_a_value_of_a_kind_that_its_column_cannot_hold_is_left_behind(new):
    loose = sqlite3.connect(":memory:")
    loose.execute("CREATE TABLE plugged (drive, since, device, bay)")
    loose.executemany("INSERT INTO plugged VALUES (1, ?, ?, NULL)", [(1, "/dev/sda"), (2, b"\xff")])
    found = carry(loose, new)
    assert (found.rows, found.gaps) == ({"plugged": 1}, {"plugged": 1})
    assert tables_of(loose) == {"plugged"}
    loose.close()


def test_a_history_that_lacks_newer_tables_comes_over(history, new):
    history._db.conn.execute("DROP TABLE io_five")
    found = carry(history._db.conn, new)
    assert "io_five" not in found.rows
    assert isinstance(history, History)


_CELLS = {"TEXT": "invented", "REAL": 1.0, "BLOB": b"invented", "ANY": "invented"}


def _fill(connection, number):
    """One row a table, of a drive and a series with this number; which table names them, the schema tells."""
    strict = "SELECT name FROM pragma_table_list WHERE strict AND schema = 'main'"
    for (table,) in connection.execute(strict).fetchall():
        about = connection.execute("SELECT name, type FROM pragma_table_info(?)", (table,)).fetchall()
        cells = {name: _CELLS.get(sort, number) for name, sort in about}
        if table in {"sentence", "way", "left_off"}:
            cells |= {name: f"{number}" for name, sort in about if sort == "TEXT"}
        if table == "thinned":
            cells["what"] = "pass"
        names, marks = ", ".join(cells), ", ".join("?" * len(cells))
        connection.execute(f"INSERT INTO {table} ({names}) VALUES ({marks})", tuple(cells.values()))  # noqa: S608  # our own schema


def _rows_of(connection, table):
    return connection.execute(f"SELECT count(*) FROM {table}").fetchone()[0]  # noqa: S608  # likewise


def test_of_a_drive_that_is_lost_nothing_is_left_in_any_table_for_the_next_one_to_take_up(new):
    _fill(new, 1)
    _fill(new, 2)
    assert new.execute("PRAGMA foreign_key_check").fetchall() == []
    strict = "SELECT name FROM pragma_table_list WHERE strict AND schema = 'main'"
    tables = {name for (name,) in new.execute(strict)} - {"sentence", "way", "left_off"}
    assert {_rows_of(new, name) for name in tables} == {2}
    new.execute("DELETE FROM drive WHERE number = 1")
    assert let_go_of_orphans(new) == len(tables - {"drive"})
    assert {_rows_of(new, name) for name in tables} == {1}
    assert new.execute("PRAGMA foreign_key_check").fetchall() == []
