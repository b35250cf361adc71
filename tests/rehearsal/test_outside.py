"""The counters that invented drives show, held against what is known from outside: turns, queues, standards.

Nothing here asks the simulator what it meant: only what the kernel's totals and the drive's own log came to.
"""

from math import pi
from random import Random
from statistics import fmean, pvariance

import pytest

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.disk import FEW, Disk
from diskwatch.rehearsal.rotating import Mix, Service
from diskwatch.rehearsal.workload import Work
from tests.rehearsal.examples import HDD, NVME, disk, hdd, hour, live, machine, nvme, solid

SPAN_MS = 3_600_000.0
NEAR = Mix(size=4_096, sequential=0.0, cached=0.0, stroke=1e-12, place=0.0)
"""Requests without a way to go: what is left beside the turn is the same at each."""

OFFICE = Mix(size=16_384, sequential=0.2, cached=0.3, stroke=0.4)


def read_ms(one: Disk, work: Work, hours: int) -> float:
    """Mean time of a read by the kernel's totals."""
    before = one.counts
    for _ in range(hours):
        one.live(hour(), work)
    after = one.counts
    return (after.read_ms - before.read_ms) / (after.reads - before.reads)


def reads(count: int, mix: Mix, *, direct: bool = True) -> Work:
    return Work(reads=count, reading=mix, writing=mix, direct=direct)


@pytest.mark.parametrize(("rpm", "wait"), [(7_200, 4.17), (5_400, 5.56)])
@pytest.mark.parametrize("count", [FEW, 20 * FEW])
def test_a_sector_takes_half_a_turn_to_come_round(rpm, wait, count):
    # 4.17 ms at 7,200 turns a minute, 5.56 ms at 5,400: 60 / rpm / 2 seconds.
    one = disk(hdd(rpm=rpm))
    platters = one.platters
    rest = platters.overhead_ms + platters.track_ms + 4_096 / platters.outer_rate * 1000
    assert read_ms(one, reads(count, NEAR), 12_000 // count) - rest == pytest.approx(wait, abs=0.06)


@pytest.mark.parametrize(("rpm", "turn"), [(7_200, 8.33), (5_400, 11.11)])
def test_a_read_that_fails_waits_for_whole_turns(rpm, turn):
    # 8.33 and 11.11 ms. Tries that fail with chance w need w / (1 - w) turns more in the mean.
    one = disk(hdd(rpm=rpm))
    sound = read_ms(one, reads(1_000, NEAR), 40)
    one.weaken_head(0.05)
    one.head.live(60.0)
    weakness = one.head.weakness
    one.head.growth = 0.0
    more = read_ms(one, reads(1_000, NEAR), 40) - sound
    assert more * (1 - weakness) / weakness == pytest.approx(turn, rel=0.03)


def test_data_passes_as_fast_as_the_rim_moves():
    # 95 mm at 7,200 turns a minute: about 35.8 m/s or 80 mph (common practice, no source). The rate at which
    # long reads come, at the edge and inside, is that speed times one and the same density.
    one = disk(hdd(rpm=7_200))
    speed = 2 * pi * 0.0475 * 7_200 / 60
    assert speed == pytest.approx(35.8, abs=0.05)
    assert one.platters.rim_speed == pytest.approx(speed)
    rates = []
    for place in (0.0, 0.999):
        long = Mix(size=64 * 2**20, sequential=1.0, cached=0.0, stroke=1e-12, place=place)
        rates.append(long.size / read_ms(one, reads(100, long), 10))
    radius = one.platters.inner_mm / one.platters.outer_mm
    assert rates[1] / rates[0] == pytest.approx(radius, rel=0.08), "but for the width of a zone"
    assert 1.7 <= rates[0] / rates[1] <= 2.2, "outer tracks pass about twice the data of inner ones"


def served_alone(rng: Random, one: Disk, count: int, span_ms: float) -> tuple[list[float], float]:
    """The same requests through a queue of this test's own: service times, and time under way in all."""
    arrivals = sorted(rng.random() * span_ms for _ in range(count))
    times = [one.platters.request_ms(rng, OFFICE) for _ in range(count)]
    free = under_way = 0.0
    for arrival, time in zip(arrivals, times, strict=True):
        free = max(free, arrival) + time
        under_way += free - arrival
    return times, under_way


def test_reads_and_writes_wait_as_pollaczek_and_khinchine_have_it():
    # M/G/1: the mean wait is l E[S^2] / (2 (1 - u)); the moments are taken from single requests.
    one, count, hours = disk(hdd()), 200_000, 12
    times, _ = served_alone(stream(1, "moments"), one, 50_000, SPAN_MS)
    rate, mean = count / SPAN_MS, fmean(times)
    law = rate * (pvariance(times) + mean**2) / (2 * (1 - rate * mean))
    assert 0.3 < rate * mean < 0.8
    for _ in range(hours):
        one.live(hour(), Work(reads=count // 2, writes=count // 2, reading=OFFICE, writing=OFFICE))
    counts = one.counts
    for spent, requests in ((counts.read_ms, counts.reads), (counts.write_ms, counts.writes)):
        assert spent / requests - mean == pytest.approx(law, rel=0.04)


def test_requests_under_way_are_as_many_as_a_queue_of_single_requests_has():
    # Little: the mean number under way is arrivals times the time of each, here by two ways apart.
    one, count, hours = disk(hdd()), 150_000, 8
    times, alone = served_alone(stream(2, "little"), one, count, SPAN_MS)
    for _ in range(hours):
        one.live(hour(), reads(count, OFFICE, direct=False))
    counts = one.counts
    span = hours * SPAN_MS
    under_way, used = counts.read_ms / span, counts.busy_ms / span
    assert under_way == pytest.approx(alone / SPAN_MS, rel=0.05)
    # U = l S, and who is served is one of those under way.
    assert used == pytest.approx(count / SPAN_MS * fmean(times), rel=0.02)
    assert used < under_way


def test_exponential_service_waits_as_m_m_1_has_it():
    # A flash drive whose requests have the spread of the exponential law; wait u / (m - l).
    one = disk(hdd())
    one.platters = _Exponential()  # type: ignore[assignment] # a drive of another make
    rate, serves = 0.05, 0.08
    for _ in range(12):
        one.live(hour(), reads(int(rate * SPAN_MS), OFFICE, direct=False))
    counts = one.counts
    law = rate / serves / (serves - rate)
    assert counts.read_ms / counts.reads - 1 / serves == pytest.approx(law, rel=0.03)


class _Exponential:
    """Mechanics of mean time 12.5 ms and just as great a spread."""

    def service(self, _mix):
        return Service(mean_ms=12.5, variance=12.5**2)


def test_the_log_counts_data_in_units_of_512000_bytes_rounded_up():
    # NVM Express, SMART / Health log 02h, bytes 32 to 63: thousands of 512 bytes, rounded up.
    one = machine(hdd(), nvme(load=3.0))
    one.strips["wall"].losses_a_year = 0.0
    card = one.drives[NVME]
    for day in range(1, 15):
        live(one, day)
        log, counts = card.told().log, card.counts
        assert log["data_units_read"] == -(-counts.read_bytes // 512_000)
        assert log["data_units_written"] == -(-counts.write_bytes // 512_000)
        assert (log["host_reads"], log["host_writes"]) == (counts.reads, counts.writes)
    assert card.told().log["data_units_written"] > 100


def test_wear_is_write_amplification_times_bytes_over_capacity_and_rated_turns():
    one = solid(nvme(capacity_gb=100, amplification=3.0, rated_turns=500, written_tb=4))
    mix = Mix(size=131_072, sequential=0.9, cached=0.0, stroke=0.3)
    seen = set()
    for _ in range(80):
        one.live(hour(), Work(writes=800_000, reading=mix, writing=mix, direct=True))
        written = 4e12 + one.counts.write_bytes
        expected = int(100 * 3.0 * written / 100e9 / 500)
        assert one.told().log["percentage_used"] == min(255, expected)
        seen.add(expected)
    assert len(seen) > 20


def test_the_drives_of_a_machine_keep_the_law_of_utilisation():
    # U = l S of a whole machine's day: busy time is what its requests took beside their wait.
    one = machine(hdd(load=4.0))
    live(one, 1)
    before = one.drives[HDD].counts
    live(one, 2)
    after = one.drives[HDD].counts
    busy = after.busy_ms - before.busy_ms
    spent = after.read_ms + after.write_ms - before.read_ms - before.write_ms
    assert 0 < busy <= spent
    assert busy < 86_400_000
