from dataclasses import replace

import pytest

from diskwatch.errors import HistoryUnfit
from diskwatch.history.writer import History
from diskwatch.records import Entry, LeftOff, Listened, Round
from diskwatch.service.waiting import Notes, Traffic, Waiting, called, store
from tests.history.examples import NOON, a_drive, a_part, a_pass, a_place, a_round, a_span


def a_note(text):
    return Notes(entries=(Entry(at=NOON, drive=None, kind="watch", text=text),))


def answered(history):
    known = history.known()[0]
    return a_round(a_part(known, replace(a_pass(NOON), answer="all of it")))


def answers(waiting):
    """The answer in full of every pass that waits."""
    return [part.pass_.answer for write in waiting if isinstance(write, Round) for part in write.drives]


@pytest.fixture
def history():
    with History.in_memory() as found:
        found.admit(a_drive(), a_place(), NOON)
        yield found


def test_writes_leave_in_the_order_in_which_they_came():
    waiting = Waiting()
    for text in "abc":
        waiting.append(a_note(text))
    left = []
    while waiting:
        left.append(waiting.first)
        waiting.done()
    assert left == [a_note(text) for text in "abc"]


def test_the_oldest_go_where_more_come_than_there_is_room_for_and_that_is_told():
    waiting = Waiting(2)
    assert waiting.told() == ""
    for text in "abcde":
        waiting.append(a_note(text))
    assert list(waiting) == [a_note("d"), a_note("e")]
    assert "the oldest 3 were given up" in waiting.told()


def test_an_answer_in_full_is_kept_only_where_it_need_not_wait(history):
    waiting = Waiting()
    waiting.append(answered(history))
    assert answers(waiting) == ["all of it"]
    waiting.append(answered(history))
    assert answers(waiting) == ["all of it", None]
    waiting.done()
    waiting.done()
    waiting.append(answered(history))
    waiting.lighten()
    assert answers(waiting) == [None]


def test_each_sort_of_write_goes_where_it_belongs(history):
    store(history, answered(history))
    store(history, Traffic(spans=(a_span(1),)))
    store(history, a_note("said"))
    totals = {1: {"kernel-io-errors": 3}}
    left_off = LeftOff(log="invented", sequence=4)
    store(history, Listened(source="invented", left_off=left_off, gathered="", totals=totals))
    counted = {
        table: history._db.conn.execute(f"SELECT count(*) FROM {table}").fetchone()[0]  # noqa: S608
        for table in ("pass", "io_minute", "day_book", "heard")
    }
    assert counted == {"pass": 1, "io_minute": 1, "day_book": 1, "heard": 1}


def test_what_speaks_of_a_drive_that_is_not_there_does_not_fit(history):
    with pytest.raises(HistoryUnfit, match="speaks of a drive that is not in the history"):
        store(history, Traffic(spans=(a_span(7),)))


def test_each_sort_of_write_has_a_name_for_people(history):
    listened = Listened(source="invented", left_off=LeftOff(log="", sequence=0), gathered="", totals={})
    names = [called(one) for one in (answered(history), Traffic(spans=()), a_note("It said."), listened)]
    assert len(set(names)) == 4
    assert "It said." in names[2]
