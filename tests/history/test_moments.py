from diskwatch.history.moments import Dated, turn_at
from tests.history.examples import NOON, a_value, keep


def test_a_state_of_a_later_turn_is_the_later_one_whatever_its_time():
    first, then = Dated(turn=0, at=NOON, state="first"), Dated(turn=1, at=NOON - 60, state="then")
    assert max(first, then) is then


def test_the_turn_grows_when_the_clock_was_set_back_and_not_within_a_second(history, known):
    for step, at in enumerate((NOON, NOON, NOON + 60, NOON + 30, NOON + 30, NOON + 90, NOON)):
        keep(history, known, at, a_value(value=step))
    found = history._db.conn.execute(
        "SELECT at - ?, nth, turn FROM pass ORDER BY turn, at, nth", (NOON,)
    ).fetchall()
    assert found == [
        (0, 0, 0), (0, 1, 0), (60, 0, 0),
        (30, 0, 1), (30, 1, 1), (90, 0, 1),
        (0, 2, 2),
    ]  # fmt: skip  # one line a turn


def test_the_turn_at_a_time_is_that_of_the_last_pass_up_to_it(history, known):
    connection = history._db.conn
    assert turn_at(connection, known.number, NOON) == 0
    for at in (NOON, NOON + 60, NOON + 30):
        keep(history, known, at, a_value())
    assert [turn_at(connection, known.number, NOON + more) for more in (-1, 0, 29, 30, 59, 60, 99)] == [
        0, 0, 0, 1, 1, 0, 0,
    ]  # fmt: skip  # one a time
