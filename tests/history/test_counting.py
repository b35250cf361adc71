from diskwatch.history.counting import NOTHING_YET, count, counted_before, set_counted
from tests.history.examples import DAY, NOON


def test_passes_are_counted_into_their_days_by_outcome(history, known, rows):
    with history._writing() as connection:
        count(connection, known.number, [(NOON, "read"), (NOON + 9, "asleep"), (NOON + DAY, "read")])
        count(connection, known.number, [(NOON + 60, "read"), (NOON - 60, "read")])
    today = NOON // DAY
    assert rows("SELECT day, outcome, passes, first, last FROM pass_day ORDER BY day, outcome") == [
        (today, "asleep", 1, NOON + 9, NOON + 9),
        (today, "read", 3, NOON - 60, NOON + 60),
        (today + 1, "read", 1, NOON + DAY, NOON + DAY),
    ]


def test_the_mark_of_a_drive_is_its_own_and_moves(history, known):
    with history._writing() as connection:
        assert counted_before(connection, known.number) == NOTHING_YET
        set_counted(connection, known.number, NOON)
        set_counted(connection, known.number, NOON + 1)
        assert counted_before(connection, known.number) == NOON + 1
        assert counted_before(connection, known.number + 1) == NOTHING_YET
