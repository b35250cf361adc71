from typing import Any

import pytest

from diskwatch.errors import HistoryError
from diskwatch.history import packing
from diskwatch.history.round import write_round
from diskwatch.history.writer import History
from diskwatch.records import Attribute, CallWord, Entry, Failing, KnownDrive, Outcome, SignalKind, Value
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
)


@pytest.fixture
def known(history):
    return history.admit(a_drive(), a_place(), NOON)


@pytest.fixture
def rows(history):
    return lambda sql: history._db.conn.execute(sql).fetchall()


def _read(history: History, known: KnownDrive, at: int, *values: Value, **part: Any) -> None:
    history.record(a_round(a_part(known, a_pass(at, *values), **part), at=at))


def test_a_value_is_stored_when_it_changes_and_every_pass_always(history, known, rows):
    for step, value in enumerate([0, 0, 0, 8, 8, 0]):
        _read(history, known, NOON + step, a_value(value=value))
    assert rows("SELECT at, value FROM fresh") == [(NOON, 0), (NOON + 3, 8), (NOON + 5, 0)]
    assert rows("SELECT at FROM pass") == [(NOON + step,) for step in range(6)]
    assert rows("SELECT since, value FROM latest") == [(NOON + 5, 0)]


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


def test_a_value_that_becomes_unknown_or_known_again_is_a_change(history, known, rows):
    _read(history, known, NOON, a_value(value=0))
    _read(history, known, NOON + 1, a_value(value=None, reason="The log could not be read."))
    _read(history, known, NOON + 2, a_value(value=None, reason="Another reason."))
    _read(history, known, NOON + 3, a_value(value=0))
    assert rows("SELECT value, reason FROM fresh ORDER BY at") == [
        (0, None),
        (None, "The log could not be read."),
        (None, "Another reason."),
        (0, None),
    ]


def test_the_word_5_is_not_the_number_5(history, known, rows):
    _read(history, known, NOON, a_value(value=5))
    _read(history, known, NOON + 1, a_value(value="5"))
    assert rows("SELECT value, typeof(value) FROM fresh ORDER BY at") == [(5, "integer"), ("5", "text")]


def test_a_signal_whose_unit_changes_starts_a_new_series(history, known, rows):
    _read(history, known, NOON, a_value(value=7, unit="opaque"))
    _read(history, known, NOON + 1, a_value(value=7, unit="sectors"))
    assert rows("SELECT unit, current FROM series ORDER BY number") == [("opaque", 0), ("sectors", 1)]
    assert rows("SELECT series, at, value FROM fresh ORDER BY at") == [(1, NOON, 7), (2, NOON + 1, 7)]


def test_a_signal_read_from_elsewhere_stays_the_same_series(history, known, rows):
    _read(history, known, NOON, a_value())
    _read(history, known, NOON + 1, a_value(kind=SignalKind.GAUGE))
    assert rows("SELECT number, kind FROM series") == [(1, "gauge")]
    assert rows("SELECT at FROM fresh") == [(NOON,)]


def test_a_doubled_signal_or_finding_does_not_cost_the_round(history, known, rows):
    doubled = (a_finding(sentence="first"), a_finding(sentence="second"))
    _read(history, known, NOON, a_value(value=1), a_value(value=2), findings=doubled)
    assert rows("SELECT value FROM latest") == [(2,)]
    assert rows("SELECT sentence FROM finding") == [("second",)]


def test_values_of_past_days_are_filed_by_series_at_the_first_round_of_a_day(history, known, rows):
    _read(history, known, NOON, a_value(value=1))
    assert rows("SELECT count(*) FROM value") == [(0,)]
    _read(history, known, NOON + DAY, a_value(value=2))
    assert rows("SELECT series, at, value FROM value") == [(1, NOON, 1)]
    assert rows("SELECT series, at, value FROM fresh") == [(1, NOON + DAY, 2)]


def test_a_drive_that_was_not_read_leaves_its_values_alone(history, known, rows):
    _read(history, known, NOON, a_value(value=3))
    asleep = a_pass(NOON + 1, outcome=Outcome.ASLEEP, explanation="It sleeps and was left alone.")
    history.record(a_round(a_part(known, asleep), at=NOON + 1))
    assert rows("SELECT since, value FROM latest") == [(NOON, 3)]
    assert rows("SELECT passed_at, outcome FROM drive") == [(NOON + 1, "asleep")]


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


def test_a_finding_opens_follows_its_sentence_closes_and_may_open_again(history, known, rows):
    story = [(a_finding(),), (a_finding(sentence="9 sectors"),), (), (a_finding(since=NOON + 3),)]
    for step, standing in enumerate(story):
        _read(history, known, NOON + step, findings=standing)
    assert rows("SELECT since, sentence, closed FROM finding ORDER BY number") == [
        (NOON, "9 sectors", NOON + 2),
        (NOON + 3, "8 sectors wait to be rewritten.", None),
    ]


def test_one_drives_findings_do_not_close_anothers(history, known, rows):
    other = history.admit(a_drive("INVENTED-2"), a_place("/dev/sdb"), NOON)
    _read(history, known, NOON, findings=(a_finding(),))
    _read(history, other, NOON + 1)
    assert rows("SELECT drive, closed FROM finding") == [(known.number, None)]


def test_only_a_change_of_call_makes_a_new_one(history, known):
    rows = history._db.conn.execute
    _read(history, known, NOON, call=a_call())
    _read(history, known, NOON + 1, call=a_call(reason="9 sectors", evidence=5000.0))
    assert rows("SELECT number, at, reason FROM call").fetchall() == [(1, NOON, "9 sectors")]
    _read(history, known, NOON + 2, call=a_call(CallWord.COPY, NOON + 2))
    _read(history, known, NOON + 3, call=None)
    assert rows("SELECT at, word FROM call").fetchall() == [(NOON, "look"), (NOON + 2, "copy")]


def test_a_clock_that_was_set_back_does_not_bring_an_old_call_back(history, known):
    _read(history, known, NOON, call=a_call())
    _read(history, known, NOON - 900, call=a_call(CallWord.RETIRE, NOON - 900))
    assert history.calls()[known.number].word is CallWord.RETIRE


def test_the_last_evidence_of_a_day_is_kept_for_each_day(history, known, rows):
    for at, days in [(NOON, 1.0), (NOON + 60, 2.0), (NOON + DAY, 3.0), (NOON + 3 * DAY, 4.0)]:
        _read(history, known, at, a_value(), evidence={"pending-sectors": days})
    today = NOON // DAY
    assert rows("SELECT day, evidence FROM evidence") == [(today, 2.0), (today + 1, 3.0)]
    assert rows("SELECT day, evidence FROM latest") == [(today + 3, 4.0)]


def test_evidence_of_what_no_drive_reports_is_kept_and_joins_its_values_later(history, known, rows):
    _read(history, known, NOON, evidence={"read-latency": 1.5})
    _read(history, known, NOON + 1, a_value("read-latency", 900, "microseconds"))
    assert rows("SELECT unit, value, since, evidence FROM series JOIN latest ON series = number") == [
        ("microseconds", 900, NOON + 1, 1.5)
    ]


def test_a_state_is_replaced_and_kept_where_a_pass_did_not_move_it(history, known):
    _read(history, known, NOON, state="one")
    _read(history, known, NOON + 1, state=None)
    assert history.states() == {known.number: "one"}
    _read(history, known, NOON + 2, state="two")
    assert history.states() == {known.number: "two"}


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


def test_a_signal_that_is_no_longer_read_is_no_longer_known(history, known, rows):
    _read(history, known, NOON, a_value(value=3), a_value("crc-errors", 1, "events"))
    _read(history, known, NOON + 1, a_value(value=3))
    _read(history, known, NOON + 2, a_value(value=3))
    _read(history, known, NOON + 3, a_value(value=3), a_value("crc-errors", 1, "events"))
    assert rows("SELECT at, value, reason FROM fresh WHERE series = 2 ORDER BY at") == [
        (NOON, 1, None),
        (NOON + 1, None, "it was not in this reading"),
        (NOON + 3, 1, None),
    ]


def test_the_state_at_the_end_of_every_week_is_kept_as_it_was(history, known):
    week = 7 * DAY
    monday = NOON // week * week
    for step, at in enumerate([monday, monday + DAY, monday + week, monday + week + 5, monday + 3 * week]):
        _read(history, known, at, a_value(value=step), state=f"state {step}")
    assert history.copies(known.number) == ((monday + DAY, "state 1"), (monday + week + 5, "state 3"))


def test_what_a_judgement_rests_on_beside_the_values_is_kept_on_change(history, known, rows):
    def attribute(raw: str, failing: Failing | None) -> Attribute:
        return Attribute(
            number=5, name="Invented", value=1, worst=1, threshold=9, prefail=True, raw=raw, failing=failing
        )

    for step, (raw, failing) in enumerate(
        [("1", None), ("2", None), ("3", Failing.NOW), ("3", Failing.NOW), ("3", Failing.PAST)]
    ):
        pass_ = a_pass(NOON + step, attributes=(attribute(raw, failing),))
        history.record(a_round(a_part(known, pass_), at=NOON + step))
    kept = [(at, packing.beside(packed).attributes) for at, packed in rows("SELECT at, packed FROM beside")]
    assert kept == [(NOON, ()), (NOON + 2, (attribute("3", Failing.NOW),)), (NOON + 4, ())]
