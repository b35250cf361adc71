import re
from collections.abc import Collection
from typing import Any

import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.history import bays, questions
from diskwatch.history.forecasts import kept_forecasts, latest_forecasts
from diskwatch.history.leaving import lines_of
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.records import Entry, KnownDrive, Outcome, Pass, Value
from tests.history.examples import (
    DAY,
    NOON,
    a_drive,
    a_part,
    a_pass,
    a_place,
    a_round,
    a_span,
    a_value,
    full_round,
)

LARGE = (
    "value",
    "fresh",
    "pass",
    "pass_day",
    "io_minute",
    "io_five",
    "io_day",
    "evidence",
    "day_book",
    "kept_state",
    "forecast",
    "probe",
)


@pytest.fixture
def connection(history):
    return history._db.conn


@pytest.fixture
def known(history):
    return history.admit(a_drive(), a_place(), NOON)


def _read(history: History, known: KnownDrive, at: int, *values: Value, **part: Any) -> None:
    history.record(a_round(a_part(known, a_pass(at, *values), **part), at=at))


@pytest.fixture
def grown(history, known, connection):
    """A history large enough that whether an index serves a question can be seen."""
    for number in range(60):
        history.record(full_round(known, NOON + number * DAY // 4, number))
        history.add_traffic([a_span(at=NOON + number * 60)])
        connection.execute(
            "INSERT INTO forecast VALUES (1, 'percentage-used', ?, 100, 'drive', 1, 2, 0.8, NULL, NULL)",
            (number,),
        )
    file_past_days(connection, NOON // DAY + 12)
    connection.execute("ANALYZE")
    return connection


@pytest.mark.parametrize(
    "ask",
    [
        lambda connection: questions.day_book(connection, None, None, None, None),
        lambda connection: questions.day_book(connection, NOON, 1, ["rise"], 5),
        lambda connection: questions.passes(connection, 1, None, None),
        lambda connection: questions.passes(connection, 1, NOON, 5),
        lambda connection: questions.series(connection, 1, "pending-sectors", None),
        lambda connection: questions.series(connection, 1, "pending-sectors", NOON + DAY),
        lambda connection: questions.evidence(connection, 1, "pending-sectors", None),
        lambda connection: questions.traffic(connection, 1, NOON, NOON + DAY),
        lambda connection: questions.last_reading(connection, 1),
        lambda connection: questions.state(connection, 1),
        bays.drive_lines,
        latest_forecasts,
        lambda connection: kept_forecasts(connection, 1),
    ],
)
def test_no_question_walks_through_a_whole_large_table_or_sorts_one(grown, ask):
    asked: list[str] = []
    grown.set_trace_callback(asked.append)
    answer = ask(grown)
    grown.set_trace_callback(None)
    assert answer, "a question without an answer proves nothing"
    assert asked
    for sql in asked:
        plan = [row[3] for row in grown.execute(f"EXPLAIN QUERY PLAN {sql}")]
        scans = [step for step in plan if re.search(rf"SCAN ({'|'.join(LARGE)})\b", step)]
        assert not scans, (sql, plan)


def test_the_day_book_reads_oldest_first_and_a_limit_keeps_the_newest(history, known, connection):
    written = [
        Entry(at=NOON + 2, drive=None, kind="watch", text="c"),
        Entry(at=NOON, drive=known.number, kind="rise", text="a"),
        Entry(at=NOON, drive=known.number, kind="call", text="b", data={"from": None, "to": "look"}),
    ]
    history.note(*written)

    def texts(
        since: int | None = None,
        drive: int | None = None,
        kinds: Collection[str] | None = None,
        limit: int | None = None,
    ) -> str:
        found = questions.day_book(connection, since, drive, kinds, limit)
        return "".join(entry.text for entry in found)

    assert texts() == "abc"
    assert texts(since=NOON + 1) == "c"
    assert texts(drive=known.number) == "ab"
    assert texts(drive=99) == ""
    assert texts(kinds={"call", "watch"}) == "bc"
    assert texts(kinds=()) == ""
    assert texts(limit=2) == "bc"
    assert texts(limit=0) == ""
    assert questions.day_book(connection, None, None, ["call"], None) == (written[2],)


def test_passes_read_oldest_first_and_say_how_each_ended(history, known, connection):
    _read(history, known, NOON)
    asleep = a_pass(NOON + 60, outcome=Outcome.ASLEEP, explanation="It sleeps.")
    history.record(a_round(a_part(known, asleep), at=NOON + 60))
    _read(history, known, NOON + 120)
    found = questions.passes(connection, known.number, None, None)
    assert [one.at - NOON for one in found] == [0, 60, 120]
    assert found[1] == Pass(
        at=NOON + 60, outcome=Outcome.ASLEEP, explanation="It sleeps.", exit_bits=0, took_ms=12
    )
    assert questions.passes(connection, known.number, None, 2) == found[1:]
    assert questions.passes(connection, known.number, NOON + 60, None) == found[1:]
    assert questions.passes(connection, 99, None, None) == ()


def test_a_series_joins_what_was_filed_with_what_is_fresh(history, known, connection):
    for step, value in enumerate([1, 1, 2, None, "odd", 2**100]):
        reason = "Not printed." if value is None else None
        _read(history, known, NOON + step * DAY // 2, a_value(value=value, reason=reason))
    whole = tuple(
        (NOON + step * DAY // 2, value) for step, value in [(0, 1), (2, 2), (3, None), (4, "odd"), (5, 2**100)]
    )
    assert questions.series(connection, known.number, "pending-sectors", None) == whole


@given(
    st.lists(
        st.tuples(st.integers(1, DAY), st.none() | st.integers(0, 2) | st.sampled_from(["2", "odd"])),
        max_size=12,
    ),
    st.integers(0, 12),
)
@settings(max_examples=40)
def test_whatever_was_read_when_the_series_says_what_held_at_every_time(readings, asked_from):
    """Against the plainest model: the value that the last pass up to a time brought."""
    with History.in_memory() as history:
        known = history.admit(a_drive(), a_place(), NOON)
        at, brought = NOON, []
        for step, value in readings:
            at += step
            brought.append((at, value))
            _read(history, known, at, a_value(value=value, reason="Not printed." if value is None else None))
        since = brought[min(asked_from, len(brought) - 1)][0] if brought else None
        found = questions.series(history._db.conn, known.number, "pending-sectors", since)
        if since is not None:
            (line,) = bays.drive_lines(history._db.conn)
            assert line.signals[0].value == brought[-1][1]
            assert found[-1] == (line.signals[0].since, line.signals[0].value)
    changes = [
        one
        for one, before in zip(brought, [None, *brought], strict=False)
        if before is None or one[1] != before[1]
    ]
    held = [one for one in changes if since is None or one[0] <= since][-1:]
    assert list(found) == held + [one for one in changes if since is not None and one[0] > since]


def test_a_series_from_a_time_begins_with_the_value_that_held_then(history, known, connection):
    for step in range(4):
        _read(history, known, NOON + step * DAY, a_value(value=step))
    signal = (known.number, "pending-sectors")
    assert questions.series(connection, *signal, NOON + 2 * DAY)[0] == (NOON + 2 * DAY, 2)
    assert questions.series(connection, *signal, NOON + 2 * DAY - 1)[0] == (NOON + DAY, 1)
    assert questions.series(connection, *signal, NOON + 9 * DAY) == ((NOON + 3 * DAY, 3),)
    assert questions.series(connection, *signal, NOON - 1)[0] == (NOON, 0)
    assert questions.series(connection, known.number, "no-such-signal", None) == ()


def test_a_series_speaks_of_the_current_unit_only(history, known, connection):
    _read(history, known, NOON, a_value(value=2**40, unit="opaque"))
    _read(history, known, NOON + 1, a_value(value=7, unit="sectors"))
    assert questions.series(connection, known.number, "pending-sectors", None) == ((NOON + 1, 7),)


def test_evidence_reads_by_day_with_today_and_through_a_change_of_unit(history, known, connection):
    for day, unit in enumerate(["opaque", "opaque", "sectors", "sectors"]):
        at = NOON + day * DAY
        _read(history, known, at, a_value(unit=unit), evidence={"pending-sectors": float(day)})
    today = NOON // DAY
    whole = tuple((today + day, float(day)) for day in range(4))
    assert questions.evidence(connection, known.number, "pending-sectors", None) == whole
    assert questions.evidence(connection, known.number, "pending-sectors", NOON + 2 * DAY) == whole[2:]
    assert questions.evidence(connection, known.number, "no-such-signal", None) == ()


def test_traffic_reads_by_the_minute_for_one_drive(history, known, connection):
    other = history.admit(a_drive("INVENTED-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
    spans = [a_span(drive, NOON + ten * 10) for ten in range(1, 13) for drive in (known.number, other.number)]
    history.add_traffic(spans[:10])
    history.add_traffic(spans[10:])
    found = questions.traffic(connection, known.number, NOON, NOON + 120)
    six = dict.fromkeys(("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms", "busy_ms"), 6)
    assert found == tuple(a_span(known.number, NOON + end, 60.0, **six) for end in (60, 120))
    assert questions.traffic(connection, known.number, NOON + 60, NOON + 120) == found[1:]
    assert questions.traffic(connection, known.number, NOON, NOON + 60) == found[:1]


def test_what_was_last_read_beside_the_values_is_there_whole(history, known, connection):
    assert questions.last_reading(connection, known.number) is None
    assert questions.state(connection, known.number) is None
    round_ = full_round(known, number=5)
    history.record(round_)
    reading = round_.drives[0].pass_.reading
    assert reading is not None
    found = questions.last_reading(connection, known.number)
    assert found is not None
    assert found.attributes == reading.attributes
    assert questions.state(connection, known.number) == "state 5"


def test_the_strongest_evidence_of_a_day_is_told_by_drive_with_today(history, known, connection):
    other = history.admit(a_drive("INVENTED-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
    for day in range(4):
        at = NOON + day * DAY
        both = {"pending-sectors": 2.0 + day, "crc-errors": 3.0}
        values = (a_value(), a_value("crc-errors"))
        part = a_part(known, a_pass(at, *values), evidence=both)
        more = a_part(other, a_pass(at, a_value()), evidence={"pending-sectors": 7.0})
        history.record(a_round(part, more, at=at))
    today = NOON // DAY
    found = questions.strongest(connection, NOON + DAY)
    assert found[known.number] == ((today + 1, 3.0), (today + 2, 4.0), (today + 3, 5.0))
    assert [worth for _, worth in found[other.number]] == [7.0, 7.0, 7.0]
    assert questions.strongest(connection, NOON + 9 * DAY) == {}


def test_evidence_of_a_day_that_was_lived_twice_is_told_once_as_it_was_last(history):
    known = history.admit(a_drive(), a_place(), NOON)
    for at, days in ((NOON, 5.0), (NOON + DAY, 9.0), (NOON + 60, 2.0)):
        part = a_part(known, a_pass(at, a_value()), evidence={"pending-sectors": days})
        history.record(a_round(part, at=at))
    today = NOON // DAY
    assert questions.evidence(history._db.conn, 1, "pending-sectors", None) == ((today, 2.0), (today + 1, 9.0))
    told = [
        (one.at // DAY, one.fields["evidence"])
        for one in lines_of(history._db.conn, 1)
        if one.record == "evidence"
    ]
    assert sorted(told) == [(today, 2.0), (today + 1, 9.0)]
