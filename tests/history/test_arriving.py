import json
from dataclasses import replace

import pytest
from hypothesis import given, strategies as st

from diskwatch.history.arriving import described, take_in
from diskwatch.history.exchange import Line
from diskwatch.history.leaving import lines_of
from diskwatch.history.moments import Dated
from diskwatch.history.taking import TAKES
from diskwatch.history.writer import History
from tests.history.examples import NOON, a_drive, a_part, a_pass, a_place, a_round, full_round


def _lines():
    with History.in_memory() as source:
        known = source.admit(a_drive(), a_place(), NOON)
        for number in range(3):
            source.record(full_round(known, NOON + number * 60, number))
        return tuple(lines_of(source._db.conn, 1))


LINES = _lines()


def test_a_drive_comes_out_as_it_went_in():
    found = described(LINES[0])
    assert (found.drive, found.place.device, found.first_seen) == (a_drive(), "/dev/sda", NOON)


@pytest.mark.parametrize("change", [{"kind": "wonder"}, {"serial": 5}, {"capacity_bytes": "big"}])
def test_a_drive_that_cannot_be_right_is_refused(change):
    with pytest.raises(ValueError, match=r"."):
        described(Line(record="drive", drive=1, at=NOON, fields={**LINES[0].fields, **change}))
    lacking = {key: value for key, value in LINES[0].fields.items() if key not in change}
    with pytest.raises(ValueError, match="lacks"):
        described(Line(record="drive", drive=1, at=NOON, fields=lacking))


def test_the_first_passes_of_either_side_are_told(history):
    history.admit(a_drive(), a_place(), NOON)
    with history._writing() as connection:
        arrived = take_in(connection, 1, LINES[1:])
        again = take_in(connection, 1, LINES[1:])
    assert (arrived.wrong, arrived.new_from, arrived.own_from) == ((), NOON, None)
    assert (again.wrong, again.new_from, again.own_from) == ((), None, None)
    assert arrived.states == (Dated(turn=0, at=NOON + 120, state="state 2"),)


def test_passes_of_one_second_arrive_all_and_none_of_them_twice(history):
    with History.in_memory() as source:
        known = source.admit(a_drive(), a_place(), NOON)
        for took in range(3):
            source.record(a_round(a_part(known, replace(a_pass(NOON), took_ms=took))))
        with source._writing() as connection:
            connection.execute("DELETE FROM pass WHERE nth = 1")  # as thinning does
        lines = tuple(lines_of(source._db.conn, 1))[1:]
        with source._writing() as connection:
            assert take_in(connection, 1, lines).wrong == ()
            assert tuple(lines_of(connection, 1))[1:] == lines
    history.admit(a_drive(), a_place(), NOON)
    with history._writing() as connection:
        assert take_in(connection, 1, lines).wrong == ()
        assert connection.execute("SELECT nth, took_ms FROM pass").fetchall() == [(0, 0), (2, 2)]


def test_a_pass_written_before_passes_of_one_second_were_kept_apart_arrives(history):
    old = [
        Line(record=one.record, drive=1, at=one.at, fields={k: v for k, v in one.fields.items() if k != "nth"})
        for one in LINES
        if one.record == "pass"
    ]
    history.admit(a_drive(), a_place(), NOON)
    with history._writing() as connection:
        assert take_in(connection, 1, old).wrong == ()
        assert connection.execute("SELECT count(*) FROM pass").fetchone() == (3,)


json_values: st.SearchStrategy[object] = (
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=5) | st.just([]) | st.just({})
)


@given(st.sampled_from(range(1, len(LINES))), st.data())
def test_whatever_stands_in_a_row_it_is_taken_in_or_named_and_nothing_else_happens(which, data):
    line = LINES[which]
    key = data.draw(st.sampled_from(sorted(line.fields)))
    spoilt = Line(
        record=line.record, drive=1, at=line.at, fields={**line.fields, key: data.draw(json_values)}, number=7
    )
    with History.in_memory() as history:
        history.admit(a_drive(), a_place(), NOON)
        with history._writing() as connection:
            wrong = take_in(connection, 1, [spoilt]).wrong
        assert all(one.startswith("row 7 is left out: ") for one in wrong)
        assert history._db.conn.execute("PRAGMA integrity_check").fetchone() == ("ok",)
        # What was taken in can be told again.
        assert tuple(lines_of(history._db.conn, 1))


@pytest.mark.parametrize("name", ["nth", "turn"])
@pytest.mark.parametrize("number", [-1, 2**63 - 1, 2**70, 1.0])
def test_a_place_among_the_passes_that_leaves_no_room_for_own_ones_is_refused(history, name, number):
    history.admit(a_drive(), a_place(), NOON)
    line = next(one for one in LINES if one.record == "pass")
    spoilt = Line(record="pass", drive=1, at=line.at, fields={**line.fields, name: number}, number=7)
    with history._writing() as connection:
        (told,) = take_in(connection, 1, [spoilt]).wrong
        assert told.startswith("row 7 is left out: ")
        assert connection.execute("SELECT count(*) FROM pass").fetchone() == (0,)


def test_usual_times_and_forecasts_arrive_and_the_times_under_a_name_that_no_port_has(history):
    known = history.admit(a_drive(), a_place(), NOON)
    connection = history._db.conn
    day = NOON // 86_400
    times = {"state": '{"key": "port-1 F1", "scored": 0.1}'}
    forecast = {
        "signal": "percentage-used",
        "at_limit": 100,
        "limit_from": "standard",
        "low": 12.5,
        "high": None,
        "probability": 0.8,
        "reason": None,
        "reached": None,
    }
    lines = [
        Line(record="latency", drive=1, at=NOON, fields=times),
        Line(record="forecast", drive=1, at=NOON, fields=forecast),
        Line(record="forecast", drive=1, at=NOON, fields={**forecast, "limit_from": "a friend"}),
        Line(record="forecast", drive=1, at=NOON, fields={**forecast, "at_limit": None}),
        Line(record="latency", drive=1, at=NOON, fields={"state": "[]"}),
    ]
    arrived = take_in(connection, known.number, lines)
    assert len(arrived.wrong) == 3
    kept = history.learnt(1)
    assert kept is not None
    assert (kept.through, json.loads(kept.state)) == (day, {"key": "elsewhere port-1 F1", "scored": 0.1})
    ((one,),) = history.forecasts().values()
    assert (one.low, one.high, one.made_on_day) == (12.5, None, day)


def test_what_the_file_does_not_let_in_is_told_in_peoples_words(history, monkeypatch):
    def refused(_into, _at, _of):
        history._db.conn.execute("INSERT INTO heard VALUES (1, 'invented', 'no number')")

    history.admit(a_drive(), a_place(), NOON)
    monkeypatch.setitem(TAKES, "heard", refused)
    (told,) = take_in(history._db.conn, 1, [Line(record="heard", drive=1, at=NOON, fields={}, number=3)]).wrong
    assert told == "row 3 is left out: a value is of the wrong kind"
