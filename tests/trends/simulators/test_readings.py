from itertools import pairwise
from random import Random

from diskwatch.trends.norms import STREAM_OF
from tests.trends.simulators.counters import World
from tests.trends.simulators.quick import Quick, alarms as quick_alarms
from tests.trends.simulators.readings import Machine, Seen, alarms, readings

MEDIA = STREAM_OF["pending-sectors"]
POWER = STREAM_OF["unsafe-power-offs"]
ALWAYS = Machine(on=1.0, away=0.0, blind=0.0, hours=24, resets=0.0)


def seen(norm, machine, world, seed=3, days=3000):
    chance = Random(seed)  # noqa: S311  # errors, not secrets
    return list(readings(chance, norm, days=days, world=world, machine=machine))


def test_a_drive_that_is_always_read_alarms_as_the_closed_form_says():
    life = seen(POWER, ALWAYS, World(times=6, spill=0.4))
    rises = [one.day + 1 for before, one in pairwise(life) if one.count > before.count]
    expected = quick_alarms(Quick(POWER.per_day), [(day, day) for day in rises], POWER.threshold)
    found, powered = alarms(iter(life), POWER)
    assert found == len(expected) > 0
    assert powered == len(life) - 1


def test_machines_are_off_away_and_unwatched_as_often_as_asked():
    life = seen(MEDIA, Machine(), World(), days=20_000)
    gaps = [one.day - before.day for before, one in pairwise(life)]
    assert 0.6 < len(life) / 20_000 < 0.75
    assert max(gaps) >= 30
    assert life[-1].hours is not None
    assert life[-1].hours > 9 * len(life)


def test_counters_fall_at_resets_and_grow_in_heavy_batches():
    life = seen(POWER, Machine(), World(), days=20_000)
    steps = [one.count - before.count for before, one in pairwise(life)]
    assert min(steps) < 0
    assert max(steps) > 500


def test_a_reset_is_no_rise():
    life = [Seen(day=day, count=count, hours=None) for day, count in enumerate((5, 5, 0, 0, 0))]
    assert alarms(iter(life), MEDIA) == (0, 4.0)
