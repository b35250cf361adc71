from dataclasses import replace
from statistics import mean

import pytest

from diskwatch.rehearsal.disk import FEW
from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.workload import NOTHING, Work
from tests.rehearsal.examples import disk, hdd, hour

MIX = Mix(size=4_096, sequential=0.0, cached=0.0, stroke=1.0)


def reads(count: int) -> Work:
    return Work(reads=count, reading=MIX, writing=MIX)


def both(count: int) -> Work:
    return Work(reads=count, writes=count, reading=MIX, writing=MIX)


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
    one = disk(hdd(capacity_gb=2_000))
    sound = per_read(one, 500, 50)
    one.weaken_head(0.04)
    for _ in range(24 * 60):
        one.live(hour(), reads(500))
    assert 0.2 < one.head.weakness < 0.5
    # A try fails with that chance under one of two heads, so that w / (1 - w) turns more are needed there.
    more = one.head.weakness / (1 - one.head.weakness) / 2 * one.platters.turn_ms
    assert per_read(one, 500, 50) == pytest.approx(sound + more, rel=0.02)
    assert one.surface.uncorrectable == 0


@pytest.mark.parametrize("count", [20, 500])
def test_a_weak_head_slows_reads_and_hardly_writes(count):
    times = []
    for growth in (0.0, 0.04):
        one = disk(hdd(capacity_gb=2_000))
        if growth:
            one.weaken_head(growth)
            one.head.live(80.0)
        for _ in range(300):
            one.live(hour(), both(count))
        counts = one.counts
        times.append((counts.read_ms / counts.reads, counts.write_ms / counts.writes))
    (read, write), (weak_read, weak_write) = times
    assert weak_read > 1.15 * read
    assert weak_write == pytest.approx(write, rel=0.02)


def test_a_weak_head_loses_sectors_by_reading_and_none_without_use():
    idle, used = disk(hdd(capacity_gb=2_000)), disk(hdd(capacity_gb=2_000))
    for one in (idle, used):
        one.surface.defects_a_year = 0.0
        one.weaken_head(1.0)
        one.head.live(40.0)
    for _ in range(24 * 60):
        idle.live(hour(), NOTHING)
        used.live(hour(), reads(20_000))
    assert (idle.surface.uncorrectable, idle.surface.pending) == (0, 0)
    assert used.surface.uncorrectable > 20
    layout = used.surface.layout
    assert {layout.head(unit) for unit in used.surface.waiting} == {used.head.number}
    assert 0 < used.timeouts < used.surface.uncorrectable


def test_power_that_goes_away_retracts_the_heads_in_an_emergency():
    one = disk(hdd(unsafe=3))
    one.lose_power(2)
    rows = {row.number: row.raw for row in one.told().rows}
    assert rows[192] == 5


def test_a_motor_seldom_needs_a_second_attempt_but_after_mains_that_failed_more_often():
    started, lost = disk(hdd()), disk(hdd())
    for _ in range(2_000):
        started.power_up()
        lost.lose_power(1)
    assert started.spin_retries <= 2
    assert 3 <= {row.number: row.raw for row in lost.told().rows}[10] <= 25


def test_an_extended_test_stops_at_a_bad_sector_and_a_short_one_does_not_look():
    one = disk(hdd())
    one.surface.scratch(one.rng, 3, 0.0)
    first = 8 * min(one.surface.clusters[0].ever)
    for extended in (False, True, True):
        one.test(extended=extended)
    assert [test.passed for test in one.tests] == [False, False, True]
    assert all(test.unreadable for test in one.tests[:2])
    assert [test.lba for test in one.tests] == [first, first, None], "each test fails at the same block"
    assert first * 512 < one.spec.capacity


def test_sectors_that_waited_when_it_came_are_somewhere_and_can_be_written_anew():
    one = disk(hdd(pending=24))
    assert one.surface.pending == 24
    large = replace(MIX, size=1_048_576, place=0.5)
    for _ in range(24 * 10):
        one.live(hour(), Work(writes=50_000, reading=MIX, writing=large))
    assert one.surface.pending == 0


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
