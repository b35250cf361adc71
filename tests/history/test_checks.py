import pytest

from diskwatch.history.checks import MORE, first
from diskwatch.history.mending import garbled
from tests.history.examples import DAY, NOON, full_round

SPOILT = [
    ("drive", "kind", "'htd'"),
    ("drive", "lives_here", "'['"),
    ("drive", "lives_here", "'7'"),
    ("drive", "capacity_bytes", "'large'"),
    ("drive", "rotation_rpm", "x'ff'"),
    ("drive", "outcome", "'reae'"),
    ("analyser_state", "packed", "x'789c0000'"),
    ("call", "word", "'loog'"),
    ("call", "cause", "'media?'"),
    ("finding", "kind", "'facu'"),
    ("finding", "signals", "'['"),
    ("finding", "data", "'[]'"),
    ("pass", "outcome", "'reae'"),
    ("series", "kind", "'coont'"),
    ("latest", "value", "x'ff'"),
    ("fresh", "value", "1.5"),
    ("value", "value", "x'ff'"),
    ("kept_state", "packed", "x''"),
    ("last_reading", "packed", "x'00'"),
    ("beside", "packed", "x'7b'"),
    ("beside", "packed", "CAST('{}' AS BLOB)"),
    ("day_book", "data", "'['"),
    ("day_book", "data", "'[]'"),
]


def readable(text):
    if not text.startswith("state "):
        raise ValueError(f"no state: {text!r}")


@pytest.fixture
def filled(history, known):
    for number in range(4):
        history.record(full_round(known, NOON + number * 4 * DAY, number))
    return history


def test_of_what_a_watch_wrote_nothing_is_garbled(filled):
    assert garbled(filled._db.conn, readable, thorough=True) == ()


@pytest.mark.parametrize(("table", "column", "spoilt"), SPOILT)
def test_a_cell_that_cannot_be_right_is_found_with_its_table_and_drive(filled, table, column, spoilt):
    connection = filled._db.conn
    rowid = {"latest": "series", "series": "number", "call": "number", "finding": "number"}.get(table)
    where = "" if rowid is None else f" WHERE {rowid} = (SELECT min({rowid}) FROM {table})"  # noqa: S608
    assert connection.execute(f"UPDATE {table} SET {column} = {spoilt}{where}").rowcount > 0  # noqa: S608
    found = garbled(connection, readable, thorough=True)
    assert {(one.check.table, one.drive) for one in found} == {(table, 1)}
    assert all(column in one.check.cells for one in found)
    assert all(one.why for one in found)


def test_a_watch_begins_with_little_and_looks_at_the_rest_later(filled):
    connection = filled._db.conn
    connection.execute("UPDATE day_book SET data = '['")
    assert garbled(connection, readable, thorough=False) == ()
    assert garbled(connection, readable, thorough=True)


def test_all_checks_name_tables_and_columns_that_there_are(filled):
    for check in (*first(readable), *MORE):
        columns = {
            name for (name,) in filled._db.conn.execute("SELECT name FROM pragma_table_info(?)", (check.table,))
        }
        assert columns >= {*check.key, *check.cells}
