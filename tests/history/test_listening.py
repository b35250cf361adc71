from dataclasses import replace

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history.arriving import Described
from diskwatch.history.exchange import Line
from diskwatch.history.moving import Part
from diskwatch.history.readings import passes_with_readings
from diskwatch.records import (
    KERNEL_LOG,
    Drive,
    Entry,
    LeftOff,
    Listened,
    Outcome,
    SignalKind,
    Value,
)
from tests.history.examples import NOON, a_drive, a_part, a_pass, a_place, a_round, a_value

SOURCE = "/dev/kmsg"


def listened(sequence=7, entries=(), totals=None):
    return Listened(
        source=SOURCE,
        left_off=LeftOff(log="a boot", sequence=sequence),
        gathered="{}",
        totals=totals or {},
        entries=entries,
    )


def counted(signal, value):
    return Value(signal=signal, value=value, unit="events", kind=SignalKind.COUNT, source=KERNEL_LOG)


def test_a_log_that_was_never_read_was_left_nowhere(history):
    assert history.left_off(SOURCE) is None
    assert history.heard_totals() == {}


def test_what_was_heard_is_kept_with_the_place_up_to_which_it_was(history):
    history.admit(a_drive(), a_place(), NOON)
    entry = Entry(at=NOON, drive=1, kind="kernel", text="It happened.")
    history.listen(listened(7, (entry,), {1: {"link-resets": 2}}))
    history.listen(listened(9, (), {1: {"link-resets": 3, "dropouts": 1}}))
    assert history.left_off(SOURCE) == (LeftOff(log="a boot", sequence=9), "{}")
    assert history.heard_totals() == {1: {"link-resets": 3, "dropouts": 1}}
    assert history._db.conn.execute("SELECT text FROM day_book").fetchall() == [("It happened.",)]


def test_nothing_is_kept_where_a_part_cannot_be(history):
    history.admit(a_drive(), a_place(), NOON)
    history.listen(listened(7))
    stranger = Entry(at=NOON, drive=99, kind="kernel", text="Whose?")
    with pytest.raises(HistoryError):
        history.listen(listened(9, (stranger,), {1: {"dropouts": 1}}))
    assert history.left_off(SOURCE)[0].sequence == 7
    assert history.heard_totals() == {}


def passes(history):
    return [pass_ for _, pass_ in passes_with_readings(history._db.conn, 1, None)]


def test_passes_come_back_with_what_was_heard_whatever_their_outcome(history):
    known = history.admit(a_drive(), a_place(), NOON)
    made = [
        replace(a_pass(NOON, a_value()), heard=(counted("link-resets", 0),)),
        replace(a_pass(NOON + 1, outcome=Outcome.ASLEEP), heard=(counted("link-resets", 2),)),
        replace(a_pass(NOON + 2, a_value()), heard=(counted("dropouts", 1), counted("link-resets", 2))),
        a_pass(NOON + 3, a_value()),
        a_pass(NOON + 4, outcome=Outcome.TIMED_OUT),
    ]
    for pass_ in made:
        history.record(a_round(a_part(known, pass_), at=pass_.at))
    back = passes(history)
    assert [{value.signal: value.value for value in one.heard} for one in back] == [
        {"link-resets": 0},
        {"link-resets": 2},
        {"dropouts": 1, "link-resets": 2},
        {},
        {},
    ]
    assert [one.reading and [value.signal for value in one.reading.values] for one in back] == [
        [a_value().signal],
        None,
        [a_value().signal],
        [a_value().signal],
        None,
    ]


def test_a_pass_without_a_reading_leaves_what_was_read_before(history):
    known = history.admit(a_drive(), a_place(), NOON)
    history.record(a_round(a_part(known, a_pass(NOON, a_value(value=5))), at=NOON))
    asleep = replace(a_pass(NOON + 1, outcome=Outcome.ASLEEP), heard=(counted("dropouts", 1),))
    history.record(a_round(a_part(known, asleep), at=NOON + 1))
    now = dict(
        history._db.conn.execute(
            "SELECT signal, value FROM series JOIN latest ON latest.series = series.number"
        ).fetchall()
    )
    assert now == {a_value().signal: 5, "dropouts": 1}


def test_counts_from_another_machine_are_counted_on_and_never_fall(history):
    drive: Drive = a_drive()
    known = history.admit(drive, a_place(), NOON)
    history.listen(listened(7, (), {1: {"link-resets": 2, "dropouts": 4}}))
    lines = [
        Line(record="heard", drive=1, at=NOON, fields={"signal": "link-resets", "total": 5}),
        Line(record="heard", drive=1, at=NOON, fields={"signal": "dropouts", "total": 1}),
    ]
    described = Described(drive=drive, place=a_place(), first_seen=NOON)
    history.arrive([Part(known=known, described=described, lines=lines)], lambda _case: None)
    assert history.heard_totals() == {1: {"link-resets": 5, "dropouts": 4}}
