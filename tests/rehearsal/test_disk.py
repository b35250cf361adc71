from statistics import mean

import pytest

from diskwatch.rehearsal.disk import FEW
from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.workload import Work
from tests.rehearsal.examples import disk, hdd, hour

MIX = Mix(size=4_096, sequential=0.0, cached=0.0, stroke=1.0)


def reads(count: int) -> Work:
    return Work(reads=count, read_size=4_096, mix=MIX)


def per_read(one, count: int, hours: int) -> float:
    before = one.counts
    for _ in range(hours):
        one.live(hour(), reads(count))
    after = one.counts
    mean: float = (after.read_ms - before.read_ms) / (after.reads - before.reads)
    return mean


def test_few_requests_served_one_by_one_take_as_long_as_many_by_their_mean():
    few, many = per_read(disk(hdd()), FEW, 200), per_read(disk(hdd()), 4 * FEW, 50)
    assert few == pytest.approx(many, rel=0.05)


def test_a_random_read_takes_12_to_17_ms_on_a_disk_that_is_idle():
    # Seek of 8 to 10 ms and half a turn of 4.17 ms (common practice, no source).
    assert 12 <= per_read(disk(hdd()), 100, 50) <= 17


def test_a_weak_head_costs_time_long_before_it_costs_data():
    one = disk(hdd())
    sound = per_read(one, 500, 50)
    one.weaken_head(0.025)
    for _ in range(24 * 100):
        one.live(hour(), reads(100))
    assert one.retried > 0.03
    assert per_read(one, 500, 50) > sound + 2 * 0.03 * one.platters.turn_ms * 0.8
    assert one.surface.uncorrectable == 0


def test_power_that_goes_away_retracts_the_heads_in_an_emergency():
    one = disk(hdd(unsafe=3))
    one.lose_power(2)
    rows = {row.number: row.raw for row in one.told().rows}
    assert rows[192] == 5


def test_an_extended_test_stops_at_a_bad_sector_and_a_short_one_does_not_look():
    one = disk(hdd())
    one.surface.scratch(3, 0.0)
    one.test(extended=False)
    one.test(extended=True)
    assert [test.passed for test in one.tests] == [False, True]
    assert one.tests[0].unreadable
    assert one.tests[0].lba is not None
    assert one.tests[0].lba * 512 < one.spec.capacity


def test_the_log_keeps_the_newest_21_tests():
    one = disk(hdd())
    for step in range(30):
        one.seconds_on = step * 3600.0
        one.test(extended=True)
    assert len(one.tests) == 21
    assert one.tests[0].hours == 29


def test_sequential_reads_are_faster_at_the_outer_edge():
    one = disk(hdd())
    times = []
    for place in (0.0, 0.99):
        mix = Mix(size=1_048_576, sequential=1.0, cached=0.0, stroke=0.1, place=place)
        times.append(mean(one.platters.request_ms(one.rng, mix) for _ in range(50)))
    assert times[1] > 1.6 * times[0]
