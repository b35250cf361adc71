from hypothesis import given, strategies as st

from diskwatch.trends.warmth import KEPT, Warmth, felt, usual_on


def lived(*readings):
    """All days after readings of (day, celsius), and every day that ended on the way."""
    days: tuple[Warmth, ...] = ()
    ended: list[Warmth] = []
    for day, celsius in readings:
        days, one = felt(days, day=day, celsius=celsius)
        ended += [] if one is None else [one]
    return days, ended


def test_a_day_has_the_mean_of_its_readings_and_the_highest():
    days, ended = lived((5, 30), (5, 40), (5, 35))
    assert (days[-1].mean, days[-1].highest, days[-1].readings) == (35, 40, 3)
    assert ended == []


def test_a_day_ends_with_the_first_reading_of_a_later_one():
    _, ended = lived((5, 30), (5, 44), (9, 31), (10, 32))
    assert [(one.day, one.highest) for one in ended] == [(5, 44), (9, 31)]


def test_only_the_latest_days_are_remembered():
    days, _ = lived(*((day, 30) for day in range(20)))
    assert [one.day for one in days] == list(range(20 - KEPT, 20))


def test_the_usual_temperature_of_a_day_without_readings_is_not_known():
    days, _ = lived((5, 30), (7, 31))
    assert usual_on(days, 5) == 30
    assert usual_on(days, 6) is None


def test_what_no_drive_can_have_tells_nothing():
    days, ended = lived((5, 30), (5, None), (6, 255), (6, -128))
    assert [(one.day, one.readings) for one in days] == [(5, 1)]
    assert ended == []


def test_days_ahead_are_forgotten_when_the_clock_is_set_back():
    days, ended = lived((5, 30), (400, 33), (6, 31))
    assert [one.day for one in days] == [5, 6]
    assert [one.day for one in ended] == [5, 5]


@given(st.lists(st.tuples(st.integers(0, 30), st.integers(-60, 150)), max_size=60))
def test_days_stay_in_order_whatever_the_clock_does(readings):
    days, _ = lived(*readings)
    numbers = [one.day for one in days]
    assert numbers == sorted(set(numbers))
    assert len(numbers) <= KEPT
    assert all(one.mean <= one.highest for one in days)
