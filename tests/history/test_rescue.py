import os
import sqlite3
from contextlib import closing
from dataclasses import replace

import pytest

from diskwatch.errors import HistoryDamaged, HistoryError, HistoryHeld, HistoryTooNew
from diskwatch.history.care import check, make_copy
from diskwatch.history.reader import Past
from diskwatch.history.rescue import rescue
from diskwatch.history.writer import History
from diskwatch.places import HISTORY, WATCH_LOCK, WRITE_LOCK
from diskwatch.records import (
    ClassDay,
    Direction,
    Forecast,
    Learnt,
    LeftOff,
    Listened,
    Outcome,
    Pass,
    ProbeDay,
    Way,
)
from diskwatch.units import day_number
from tests.history.damage import PAGE, pages, turn
from tests.history.examples import DAY, NOON, a_drive, a_part, a_place, a_round, a_span, full_round

ROUNDS = 300


def never() -> bool:
    return False


@pytest.fixture
def grown(folder):
    with History.open(folder) as history:
        known = history.admit(a_drive(), a_place(), NOON)
        for number in range(ROUNDS):
            history.record(full_round(known, NOON + number * DAY // 2, number))
        history.add_traffic([a_span(1, NOON + minute * 60) for minute in range(3000)])
        _tell_the_rest(history, known)
    return folder


def _tell_the_rest(history, known):
    """What few rounds bring, so that no table is empty."""
    at = NOON + ROUNDS * DAY // 2
    asleep = Pass(at=at, outcome=Outcome.ASLEEP, explanation="It sleeps.", answer="all of it")
    part = replace(
        a_part(known, asleep, state="state asleep"),
        learnt=Learnt(through=at // DAY - 1, state="learnt"),
        forecasts=(
            Forecast(
                signal="percentage-used",
                limit=100.0,
                made_on_day=day_number(at),
                low=1.0,
                high=2.0,
                probability=0.8,
                reason=None,
            ),
        ),
        probe=ProbeDay(at=at, place=1, band_us=(1, None), slice_us=(2,), disk_ms=3),
    )
    way = Way(adapter="1234:5678:0001 invented", instance="5", type="sat")
    history.record(replace(a_round(part, at=at), ways=(way,)))
    totals = {known.number: {"kernel-io-errors": 7}}
    left_off = LeftOff(log="invented", sequence=5)
    history.listen(Listened(source="invented", left_off=left_off, gathered="", totals=totals))
    history.tell(known.number, {"label": "shelf"}, at)
    day, _ = history.uncondensed(at)
    one = ClassDay(load_class=1, direction=Direction.READ, rollups=2, operations=9, histogram={3: 2})
    history.condense(day, {known.number: (one,)})
    while history.thin(at):
        pass


def test_every_table_holds_something_that_can_be_lost(grown):
    assert [name for name, found in _rows(grown / HISTORY).items() if not found] == []


def _rows(path):
    with closing(sqlite3.connect(path)) as connection:
        tables = [
            name
            for (name,) in connection.execute(
                "SELECT name FROM pragma_table_list WHERE strict AND schema = 'main'"
            )
        ]
        return {
            name: set(connection.execute(f"SELECT * FROM {name}").fetchall())  # noqa: S608
            for name in tables
        }


def _whole(folder):
    found = check(folder / HISTORY, thorough=True, stop=never)
    assert (found.finished, found.damage) == (True, ())
    with closing(sqlite3.connect(folder / HISTORY)) as connection:
        assert connection.execute("PRAGMA foreign_key_check").fetchall() == []


def test_of_a_sound_file_every_row_comes_over_and_only_the_day_book_grows(grown):
    before = _rows(grown / HISTORY)
    rescued = rescue(grown, NOON)
    after = _rows(grown / HISTORY)
    new = after["day_book"] - before["day_book"]
    after["day_book"] -= new
    assert after == before
    assert len(new) == 1
    assert _rows(rescued.aside) == before
    assert (rescued.gaps, rescued.orphans, rescued.from_copies) == ({}, 0, 0)


@pytest.mark.parametrize("offset", [0, 1, 3, 5])
@pytest.mark.parametrize("sort", ["table, inner", "table, leaf", "index, inner", "index, leaf"])
def test_whatever_page_is_damaged_most_comes_over_and_what_was_lost_is_said(grown, sort, offset):
    path = grown / HISTORY
    before = _rows(path)
    for page in pages(path)[sort][-2:]:
        turn(path, page, offset)
    damaged = path.read_bytes()
    rescued = rescue(grown, NOON)
    _whole(grown)
    assert rescued.aside.read_bytes() == damaged
    assert rescued.aside.name == "history-damaged-2026-12-01T120000Z.db"
    after = _rows(path)
    (told,) = after["day_book"] - before["day_book"]
    assert rescued.aside.name in told[4]
    kept = sum(len(after[name] & before[name]) for name in before)
    total = sum(len(found) for found in before.values())
    # An inner page of a table takes a few hundred rows with it; a leaf a few dozen.
    assert kept >= total * 0.5
    assert set().union(*(after[name] - before[name] for name in before)) == {told}
    with History.open(grown) as history:
        assert history.known()


def test_a_destroyed_leaf_costs_no_row_of_another_one(grown):
    path = grown / HISTORY
    before = _rows(path)["io_minute"]
    with closing(sqlite3.connect(path)) as connection:
        leaf = connection.execute("SELECT rootpage FROM sqlite_master WHERE name = 'io_minute'").fetchone()[0]
    whole = path.read_bytes()
    root = whole[(leaf - 1) * PAGE : leaf * PAGE]
    # The first child of the table's root (SQLite, Database File Format, 1.6).
    cell = int.from_bytes(root[12:14], "big")
    child = int.from_bytes(root[cell : cell + 4], "big")
    inside = int.from_bytes(whole[(child - 1) * PAGE + 3 :][:2], "big")
    turn(path, child, 0)
    rescued = rescue(grown, NOON)
    assert len(before - _rows(path)["io_minute"]) == inside
    assert rescued.gaps["io_minute"] == 1


@pytest.mark.parametrize("offset", [0, 16, 18])
def test_a_file_whose_first_bytes_are_damaged_comes_over_whole(grown, offset):
    before = _rows(grown / HISTORY)
    turn(grown / HISTORY, 1, offset)
    with pytest.raises(HistoryDamaged):
        History.open(grown)
    rescue(grown, NOON)
    after = _rows(grown / HISTORY)
    assert all(before[name] <= after[name] for name in before)


def test_what_the_file_has_lost_comes_from_the_newest_copy(grown):
    make_copy(grown, NOON, stop=never)
    before = _rows(grown / HISTORY)
    turn(grown / HISTORY, 1, 100)
    rescued = rescue(grown, NOON)
    after = _rows(grown / HISTORY)
    assert all(before[name] <= after[name] for name in before)
    assert rescued.from_copies == sum(len(found) for found in before.values())
    _whole(grown)


def test_without_a_copy_an_unreadable_list_of_tables_begins_anew_and_keeps_the_old_file(grown):
    turn(grown / HISTORY, 1, 100)
    damaged = (grown / HISTORY).read_bytes()
    rescued = rescue(grown, NOON)
    assert rescued.aside.read_bytes() == damaged
    with Past.open(grown) as past:
        (entry,) = past.day_book()
    assert "everything" in entry.text
    _whole(grown)


def test_rows_whose_drive_is_lost_are_left_out_and_counted(grown):
    with closing(sqlite3.connect(grown / HISTORY)) as connection, connection:
        connection.execute("DELETE FROM drive")
    rescued = rescue(grown, NOON)
    _whole(grown)
    assert rescued.orphans > ROUNDS


def test_what_stands_only_in_the_log_comes_over(grown):
    with History.open(grown) as history:
        history.record(full_round(history.known()[0], NOON + 999 * DAY, 999))
        files = [path for path in grown.iterdir() if path.name.startswith(HISTORY)]
        assert len(files) == 3
        kept = {path.name: path.read_bytes() for path in files}
    for name, content in kept.items():
        (grown / name).write_bytes(content)
    rescued = rescue(grown, NOON)
    with Past.open(grown) as past:
        assert past.state(1) == "state 999"
    assert rescued.aside.with_name(f"{rescued.aside.name}-wal").exists()


def test_two_rescues_of_one_second_keep_both_files(grown):
    first, second = rescue(grown, NOON).aside, rescue(grown, NOON).aside
    assert first != second
    assert first.exists()
    assert second.exists()


def test_a_history_that_is_being_written_is_left_alone(grown):
    with History.open(grown):
        before = (grown / HISTORY).read_bytes()
        with pytest.raises(HistoryHeld):
            rescue(grown, NOON)
        assert (grown / HISTORY).read_bytes() == before


def test_a_history_of_a_newer_version_is_left_alone(grown):
    with closing(sqlite3.connect(grown / HISTORY)) as connection, connection:
        connection.execute("PRAGMA user_version = 99")
    before = set(grown.iterdir())
    with pytest.raises(HistoryTooNew):
        rescue(grown, NOON)
    assert set(grown.iterdir()) == before


@pytest.mark.parametrize("content", [b"what somebody else needs\n", b"SQLite format 3\0" + bytes(5000), b""])
def test_a_file_of_which_nothing_says_that_it_is_ours_is_never_set_aside(folder, content):
    folder.mkdir()
    (folder / HISTORY).write_bytes(content)
    with pytest.raises(HistoryError, match="left untouched") as caught:
        rescue(folder, NOON)
    assert not isinstance(caught.value, HistoryDamaged)
    assert {path.name: path.read_bytes() for path in folder.iterdir()} == {HISTORY: content}


def test_a_file_that_says_that_it_is_ours_is_mended_also_where_no_lock_lies_beside_it(grown):
    (grown / WATCH_LOCK).unlink()
    (grown / WRITE_LOCK).unlink()
    before = _rows(grown / HISTORY)
    turn(grown / HISTORY, 1, 0)
    rescue(grown, NOON)
    after = _rows(grown / HISTORY)
    assert all(before[name] <= after[name] for name in before)


def test_where_the_new_file_cannot_be_made_the_damaged_one_stays_in_place(grown, monkeypatch):
    turn(grown / HISTORY, pages(grown / HISTORY)["table, leaf"][-1], 0)
    damaged = (grown / HISTORY).read_bytes()

    def full(*_: object) -> None:
        raise OSError(28, os.strerror(28))

    monkeypatch.setattr("diskwatch.history.rescue._swap", full)
    with pytest.raises(Exception, match="the disk that holds it is full"):
        rescue(grown, NOON)
    assert (grown / HISTORY).read_bytes() == damaged
    assert not list(grown.glob(".*"))
