import pytest

from diskwatch.history.settling import settle_calls, settle_counts, settle_last_pass, settle_signals
from diskwatch.records import CallWord, Outcome
from tests.history.examples import NOON, a_call, a_part, a_pass, a_round, a_value, keep


@pytest.fixture
def writing(history):
    with history._writing() as connection:
        yield connection


def test_passes_that_nobody_counted_are_counted_each_once(history, known, rows):
    for step, at in enumerate((NOON, NOON, NOON + 60)):
        keep(history, known, at, a_value(value=step))
    with history._writing() as connection:
        settle_counts(connection, known.number, [(NOON, 1), (NOON + 60, 0)])
    assert rows("SELECT passes, first, last FROM pass_day") == [(2, NOON, NOON + 60)]


def test_calls_of_both_sides_stand_in_order_of_time_and_none_twice(history, known, rows):
    for at, word in ((NOON, CallWord.KEEP), (NOON + 90, CallWord.COPY)):
        keep(history, known, at, call=a_call(word, at))
    with history._writing() as connection:
        here = a_call(CallWord.KEEP, NOON)
        settle_calls(connection, known.number, [here, a_call(CallWord.LOOK, NOON + 60)])
    assert [word for (word,) in rows("SELECT word FROM call ORDER BY number")] == ["keep", "look", "copy"]


def test_a_signal_is_now_what_was_read_last_also_where_the_clock_was_set_back(history, known, rows):
    for at, value in ((NOON, 3), (NOON + 60, 9), (NOON + 30, 5)):
        keep(history, known, at, a_value(value=value))
    with history._writing() as connection:
        connection.execute("DELETE FROM latest")
        settle_signals(connection, known.number)
    assert rows("SELECT since, value FROM latest") == [(NOON + 30, 5)]


def test_the_last_pass_is_the_one_made_last_also_where_the_clock_was_set_back(history, known, rows):
    for at, outcome in ((NOON, Outcome.READ), (NOON + 60, Outcome.TIMED_OUT), (NOON + 30, Outcome.ASLEEP)):
        history.record(a_round(a_part(known, a_pass(at, outcome=outcome)), at=at))
    with history._writing() as connection:
        connection.execute("UPDATE drive SET passed_at = 0, outcome = 'read', turn = 0")
        settle_last_pass(connection, known.number)
    assert rows("SELECT passed_at, outcome, turn FROM drive") == [(NOON + 30, "asleep", 1)]


def test_a_drive_without_a_pass_is_left_as_it_is(known, writing):
    settle_last_pass(writing, known.number)
    settle_signals(writing, known.number)
    assert writing.execute("SELECT passed_at, turn FROM drive").fetchall() == [(None, 0)]
