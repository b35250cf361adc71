import sqlite3
from contextlib import closing

from diskwatch.history.carrying import carry
from diskwatch.history.reader import Past
from diskwatch.history.ways import ways, write_ways
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import Round, Way
from tests.history.examples import NOON

ADAPTER = "1f75:0621:0100 INV-BRIDGE-7"
FOUND = Way(adapter=ADAPTER, instance="boot 1, disk 7", type="sat")


def test_what_a_round_found_out_of_an_adapter_is_there_at_the_next_start(folder):
    with History.open(folder) as history:
        history.record(Round(at=NOON, drives=(), ways=(FOUND,)))
    with Past.open(folder) as past:
        assert past.ways() == (FOUND,)


def test_of_each_adapter_the_last_word_stands_also_where_it_is_that_nothing_works(folder):
    closed = Way(adapter=ADAPTER, instance="boot 2, disk 3", type=None)
    other = Way(adapter="174c:2362", instance="boot 2, disk 4", type="sntasmedia")
    with History.open(folder) as history:
        history.record(Round(at=NOON, drives=(), ways=(FOUND, other)))
        history.record(Round(at=NOON + 1, drives=(), ways=(closed,)))
    with Past.open(folder) as past:
        assert past.ways() == (other, closed)


def test_a_name_that_is_no_proper_text_costs_no_round(folder):
    odd = Way(adapter="1f75:0621 \udcff", instance="boot 1, disk 7", type="sat")
    with History.open(folder) as history:
        history.record(Round(at=NOON, drives=(), ways=(odd,)))
    with Past.open(folder) as past:
        assert [one.type for one in past.ways()] == ["sat"]


def test_ways_come_over_from_a_damaged_history(folder, tmp_path):
    with History.open(folder) as history:
        history.record(Round(at=NOON, drives=(), ways=(FOUND,)))
    with (
        History.open(tmp_path / "new") as new,
        closing(sqlite3.connect(f"{(folder / HISTORY).as_uri()}?mode=ro", uri=True)) as old,
    ):
        connection = new._db.conn
        connection.execute("PRAGMA foreign_keys = OFF")
        assert carry(old, connection).rows["way"] == 1
        assert ways(connection) == (FOUND,)
        write_ways(connection, (), NOON)
        assert ways(connection) == (FOUND,)
