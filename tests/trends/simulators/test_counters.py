from math import exp, sqrt
from random import Random

import pytest

from tests.trends.simulators.counters import AT_THE_NORM, World, daily, rises

DAYS = 400_000
NORM = 12 / 365.25


def begun(world, seed=1):
    chance = Random(seed)  # noqa: S311  # errors, not secrets
    return [first for first, _ in rises(chance, per_day=NORM, days=DAYS, world=world)]


@pytest.mark.parametrize(
    "world",
    [AT_THE_NORM, World(season=1.0), World(habit=5.0), World(spill=0.6), World(times=3.0)],
)
def test_the_long_run_rate_is_the_one_asked_for(world):
    expected = DAYS * (1 - exp(-NORM * world.times))
    # Bad times come in lumps of half a year, so their share of a life scatters far more than single errors do.
    room = 0.25 * expected if world.habit > 1 else 5 * sqrt(expected) + 0.02 * expected
    assert len(begun(world)) == pytest.approx(expected, abs=room)


def test_a_summer_has_more_than_a_winter():
    first = begun(World(season=1.0))
    by_quarter = [sum(int(4 * day / 365.25) % 4 == quarter for day in first) for quarter in range(4)]
    assert max(by_quarter) > 2 * min(by_quarter)


def test_bad_times_hold_far_more_than_their_share_of_days():
    days = daily(iter([(day, day) for day in begun(World(habit=9.0))]), DAYS)
    by_month = sorted(sum(day // 30 == month for day in days) for month in range(400))
    assert by_month[-20] > 4 * max(1, by_month[200])


def test_spills_go_on_as_often_as_asked():
    chance = Random(5)  # noqa: S311  # errors, not secrets
    stretches = list(rises(chance, per_day=NORM, days=DAYS, world=World(spill=0.6)))
    mean = sum(last - first for first, last in stretches) / len(stretches)
    assert mean == pytest.approx(0.6 / 0.4, rel=0.1)


def test_a_drive_without_errors_has_none():
    assert begun(World(times=0)) == []
