import re
from collections import Counter

from diskwatch.history import exchange, leaving, packing
from diskwatch.history.arriving import _Arrival
from diskwatch.history.leaving import lines_of
from diskwatch.records import ClassDay, Direction
from tests.history.examples import NOON, a_drive, a_place, full_round


def test_every_kind_of_row_of_a_drive_leaves_and_none_of_another(history):
    known = history.admit(a_drive(), a_place(), NOON)
    other = history.admit(a_drive("INVENTED-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
    week = 7 * 86_400
    for number in range(3):
        history.record(full_round(known, NOON + number * week, number))
        history.record(full_round(other, NOON + number * week, number))
    one = ClassDay(load_class=7, direction=Direction.READ, rollups=3, operations=9, histogram={5: 3})
    history.condense(NOON // 86_400, {1: [one], 2: [one]})
    connection = history._db.conn
    connection.execute("INSERT INTO owner_fact VALUES (1, 'label', 'attic', ?)", (NOON,))
    connection.execute("INSERT INTO pass_day VALUES (1, 20000, 'read', 48, 1, 2)")
    connection.execute("INSERT INTO heard VALUES (1, 'link-resets', 3)")
    connection.execute("INSERT INTO answer VALUES (1, ?, 'keep', ?)", (NOON, packing.packed("all of it")))
    connection.execute("INSERT INTO latency_state VALUES (1, 20000, ?)", (packing.packed("{}"),))
    connection.execute("INSERT INTO forecast VALUES (1, 'x', 20000, 100, 'drive', 1, 2, 0.8, NULL, NULL)")
    connection.execute("INSERT INTO probe VALUES (1, ?, 0, 1800, ?)", (NOON, packing.packed("[[1],[2]]")))
    found = Counter(line.record for line in lines_of(connection, 1))
    assert found == {
        "drive": 1, "owner": 1, "place": 1, "passes": 1, "pass": 3, "value": 9, "beside": 1, "evidence": 6,
        "reading": 1, "heard": 1, "answer": 1, "latency": 1, "forecast": 1, "probe": 1, "load": 1, "finding": 4,
        "call": 3, "event": 3, "copy": 2, "state": 1,
    }  # fmt: skip  # a table reads better in rows
    assert {line.drive for line in lines_of(connection, 1)} == {1}


def test_numbers_beyond_any_column_leave_as_numbers(history):
    known = history.admit(a_drive(), a_place(), NOON)
    history.record(full_round(known, NOON, 5))
    values = {
        line.fields["signal"]: line.fields["value"]
        for line in lines_of(history._db.conn, 1)
        if line.record == "value"
    }
    assert values == {"pending-sectors": 5, "data-written": 2**70 + 5, "self-assessment": "word 5"}


def test_every_table_that_belongs_to_a_drive_travels_or_is_known_to_stay(history):
    connection = history._db.conn
    owned = {
        table
        for (table,) in connection.execute("SELECT name FROM pragma_table_list WHERE strict").fetchall()
        if {"drive", "series"} & {row[2] for row in connection.execute(f"PRAGMA foreign_key_list({table})")}
    }
    named = set(re.findall(r"\w+", " ".join(leaving._QUERIES.values())))
    # Traffic by the minute stays where it was measured, as the description of the file says.
    assert owned - named == {"io_minute", "io_five"}


def test_every_record_that_leaves_is_taken_in_and_described(history):
    known = history.admit(a_drive(), a_place(), NOON)
    records = set(leaving._QUERIES)
    assert records - {"drive"} == set(_Arrival(history._db.conn, known.number).takes)
    assert exchange.__doc__ is not None
    assert set(re.findall(r"^\| (\w+) \|", exchange.__doc__, re.MULTILINE)) - {"record"} == records
