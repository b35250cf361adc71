"""The bound on false alarms, measured briefly; `test_bench_bound.py` measures it long enough to be quoted."""

import pytest

from diskwatch.records import Direction
from diskwatch.trends.slowness import threshold
from tests.trends.simulators import counters, disk
from tests.trends.simulators.followed import alarms, follow
from tests.trends.simulators.streams import measure


def test_drives_at_every_norm_of_their_counters_stay_below_one_alarm_in_ten_years():
    found = measure(counters.World(spill=0.3), drives=120, years=20, seed=1)
    assert found.rate > 0.35
    assert found.upper < 0.9


def test_drives_far_below_their_norms_hardly_ever_alarm():
    assert measure(counters.World(spill=0.3, times=0.1, unlike=True), drives=150, years=20, seed=2).upper < 0.1


def test_drives_far_beyond_their_norms_do_alarm():
    assert measure(counters.World(times=20), drives=10, years=4, seed=3).rate > 10


@pytest.fixture(scope="module")
def slowing():
    """Four disks that take twice as long from day 150 on."""
    world = disk.World(visible=True, begins=150, slower=2.0)
    return [follow(world, seed=f"slowing {number}", count=200)[0] for number in range(4)]


def test_reads_that_take_twice_as_long_are_found_within_two_weeks(slowing):
    limit = threshold(Direction.READ)
    for followed in slowing:
        days = alarms(followed[Direction.READ], limit, noted=False)
        assert 150 + 4 <= days[0] <= 150 + 14


def test_the_evidence_of_the_simulator_is_that_of_the_product(slowing):
    for followed in slowing:
        reads = followed[Direction.READ]
        assert (reads.evidence > threshold(Direction.READ)) == bool(
            alarms(reads, threshold(Direction.READ), noted=False)
        )


def test_disks_whose_work_changes_openly_stay_quiet():
    for number in range(4):
        followed, rollups = follow(disk.VISIBLE, seed=f"short {number}", count=240)
        assert rollups > 8000
        assert alarms(followed[Direction.READ], threshold(Direction.READ), noted=False) == []
