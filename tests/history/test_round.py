from dataclasses import replace

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history.counting import set_counted
from diskwatch.history.questions import pass_days
from diskwatch.history.round import write_round
from diskwatch.records import Entry, KnownDrive, Outcome
from tests.history.examples import (
    DAY,
    NOON,
    a_call,
    a_drive,
    a_finding,
    a_part,
    a_pass,
    a_place,
    a_round,
    a_value,
    keep,
)


def test_passes_of_one_second_are_all_kept_also_where_the_clock_was_set_back(history, known, rows):
    told = [
        a_pass(NOON, a_value(value=1)),
        a_pass(NOON, outcome=Outcome.TIMED_OUT, explanation="It did not answer."),
        a_pass(NOON - 60, a_value(value=1)),
        a_pass(NOON, a_value(value=2)),
        a_pass(NOON + 60, outcome=Outcome.ASLEEP),
        a_pass(NOON, a_value(value=2)),
    ]
    for pass_ in told:
        history.record(a_round(a_part(known, pass_), at=pass_.at))
    assert rows("SELECT at - 1796126400, nth, outcome FROM pass WHERE at <= 1796126400 ORDER BY at, nth") == [
        (-60, 0, "read"),
        (0, 0, "read"),
        (0, 1, "timed-out"),
        (0, 2, "read"),
        (0, 3, "read"),
    ]


def test_a_doubled_signal_or_finding_does_not_cost_the_round(history, known, rows):
    doubled = (a_finding(sentence="first"), a_finding(sentence="second"))
    keep(history, known, NOON, a_value(value=1), a_value(value=2), findings=doubled)
    assert rows("SELECT value FROM latest") == [(2,)]
    assert rows("SELECT sentence FROM finding") == [("second",)]


def test_an_explanation_that_repeats_is_kept_once(history, known, rows):
    for step in range(3):
        refused = a_pass(NOON + step, outcome=Outcome.REFUSED, explanation="No right to ask.")
        history.record(a_round(a_part(known, refused), at=NOON + step))
    assert rows("SELECT text FROM sentence") == [("No right to ask.",)]
    assert rows("SELECT explanation FROM pass") == [(1,)] * 3


def test_moving_a_drive_is_noted_once_per_move(history, known, rows):
    for step, bay in enumerate(["ata-1", "ata-2", "ata-2", "ata-1"]):
        moved = KnownDrive(
            number=known.number, drive=known.drive, place=a_place(bay=bay), first_seen=known.first_seen
        )
        history.record(a_round(a_part(moved, a_pass(NOON + step)), at=NOON + step))
    assert rows("SELECT since, bay FROM plugged") == [
        (NOON, "ata-1"),
        (NOON + 1, "ata-2"),
        (NOON + 3, "ata-1"),
    ]


def test_entries_of_a_round_go_into_the_day_book_in_their_order(history, known, rows):
    entries = tuple(Entry(at=NOON, drive=known.number, kind="rise", text=name) for name in "abc")
    history.record(a_round(entries=entries))
    assert rows("SELECT text FROM day_book ORDER BY number") == [("a",), ("b",), ("c",)]


def test_a_drive_that_a_round_met_first_is_taken_up_with_it(history, rows):
    met = KnownDrive(number=7, drive=a_drive(), place=a_place(), first_seen=NOON)
    history.record(a_round(a_part(met)))
    assert history.known() == (met,)
    assert rows("SELECT drive, since FROM plugged") == [(7, NOON)]
    assert history.admit(a_drive("INVENTED-2"), a_place(), NOON).number == 8


def test_a_drive_never_grows_onto_the_history_of_another(history, known, rows):
    stranger = KnownDrive(
        number=known.number, drive=a_drive("INVENTED-2"), place=known.place, first_seen=NOON + 60
    )
    with pytest.raises(HistoryError, match=f"drive number {known.number} is another drive"):
        history.record(a_round(a_part(stranger)))
    assert history.known() == (known,)
    assert rows("SELECT count(*) FROM pass") == [(0,)]


def test_the_same_round_written_twice_changes_nothing(history, known):
    round_ = a_round(a_part(known, findings=(a_finding(),), call=a_call(), evidence={"x": 1.0}, state="s"))
    history.record(round_)
    before = list(history._db.conn.iterdump())
    with history._writing() as connection:
        write_round(connection, round_)
    assert list(history._db.conn.iterdump()) == before


def test_a_round_that_comes_once_more_is_not_told_twice_in_the_day_book(history, known):
    entry = Entry(at=NOON, drive=known.number, kind="rise", text="8 more.", data={"rise": 8})
    round_ = a_round(a_part(known, a_pass(NOON, a_value(value=8)), state="s"), entries=(entry,))
    history.record(round_)
    before = list(history._db.conn.iterdump())
    history.record(round_)
    assert list(history._db.conn.iterdump()) == before


def test_another_pass_of_the_same_second_and_length_is_another_pass(history, known, rows):
    for value in (0, 8):
        keep(history, known, NOON, a_value(value=value), state=f"state {value}")
    assert rows("SELECT nth FROM pass") == [(0,), (1,)]
    assert rows("SELECT nth, value FROM fresh") == [(0, 0), (1, 8)]


def test_a_pass_of_days_that_are_counted_already_is_counted_at_once(history, known):
    """A machine whose clock has lost its battery begins years ago."""
    with history._writing() as connection:
        set_counted(connection, known.number, NOON)
    for at in (NOON + 60, NOON - 400 * DAY, NOON - 400 * DAY + 60, NOON + 120):
        keep(history, known, at, a_value())
    days = pass_days(history._db.conn, known.number, None)
    assert [(day.day, day.passes) for day in days] == [(NOON // DAY - 400, 2), (NOON // DAY, 2)]


def test_where_a_drive_is_while_the_clock_is_behind_is_noted_once(history, known, rows):
    moved = replace(known, place=a_place(bay="ata-2"))
    keep(history, moved, NOON + 900)
    for step in range(5):
        keep(history, moved, NOON + 60 + step)
    assert rows("SELECT since, bay FROM plugged") == [
        (NOON, "ata-1"),
        (NOON + 60, "ata-2"),
        (NOON + 900, "ata-2"),
    ]
