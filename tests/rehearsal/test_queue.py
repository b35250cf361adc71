from bisect import bisect_right
from random import Random

import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.queue import Served, added, mean_wait_ms, mixed, one_by_one, together
from diskwatch.rehearsal.rotating import Mix, Platters, Service

COUNT = 200_000


def arrivals(rng: Random, rate: float, count: int = COUNT):
    now = 0.0
    for _ in range(count):
        now += rng.expovariate(rate)
        yield now


def test_exponential_service_waits_as_the_law_of_m_m_1_has_it():
    # M/M/1: the mean wait before service is u / (m - l) with service rate m, arrivals l, u = l / m.
    rng, rate, serves = stream(1, "mm1"), 0.06, 0.1
    served = added(one_by_one((at, rng.expovariate(serves)) for at in arrivals(rng, rate)))
    law = (rate / serves) / (serves - rate)
    assert served.total_ms / COUNT - 1 / serves == pytest.approx(law, rel=0.05)
    # Many at once go another way through the simulator, and come to the same.
    exponential = Service(mean_ms=1 / serves, variance=1 / serves**2)
    (many,) = together(rng, COUNT / rate, ((COUNT, exponential),), direct=False)
    assert many.total_ms / COUNT - 1 / serves == pytest.approx(law, rel=0.02)
    assert many.busy_ms / (COUNT / rate) == pytest.approx(rate / serves, rel=0.02)


def test_a_disk_waits_as_pollaczek_and_khinchine_have_it():
    # M/G/1 with the service times of turning platters.
    platters, mix = Platters(), Mix(size=16_384, sequential=0.2, cached=0.3, stroke=0.4, retried=0.01)
    rng, rate = stream(1, "mg1"), 0.06
    served = added(one_by_one((at, platters.request_ms(rng, mix)) for at in arrivals(rng, rate)))
    service = platters.service(mix)
    waited = served.total_ms / COUNT - service.mean_ms
    assert rate * service.mean_ms > 0.3
    assert waited == pytest.approx(mean_wait_ms(rate, service), rel=0.06)


def test_requests_under_way_are_arrivals_times_their_time_as_little_has_it():
    # The number under way is counted by itself, at moments drawn at random.
    rng, rate = stream(1, "little"), 0.05
    requests = [(at, rng.expovariate(0.08)) for at in arrivals(rng, rate, 20_000)]
    served, free, ends = added(one_by_one(requests)), 0.0, []
    for at, service in requests:
        free = max(free, at) + service
        ends.append(free)
    begins = [at for at, _ in requests]
    span, under_way, looks = begins[-1], 0, 40_000
    for moment in (rng.random() * span for _ in range(looks)):
        under_way += bisect_right(begins, moment) - bisect_right(ends, moment)
    assert under_way / looks == pytest.approx(served.total_ms / span, rel=0.08)


def test_many_together_come_to_what_they_come_to_one_by_one():
    platters, mix = Platters(), Mix(size=8_192, sequential=0.1, cached=0.3, stroke=0.2)
    rng, rate = stream(1, "both"), 0.05
    alone = added(one_by_one((at, platters.request_ms(rng, mix)) for at in arrivals(rng, rate)))
    span = COUNT / rate
    (many,) = together(rng, span, ((COUNT, platters.service(mix)),), direct=False)
    assert many.total_ms == pytest.approx(alone.total_ms, rel=0.05)
    assert many.busy_ms == pytest.approx(alone.busy_ms, rel=0.02)


@given(st.integers(0, 10_000), st.floats(0.01, 20), st.booleans())
def test_a_drive_is_never_busier_than_the_span_is_long(count, mean_ms, direct):
    service = Service(mean_ms=mean_ms, variance=mean_ms**2 / 2)
    other = Service(mean_ms=mean_ms / 2, variance=0.0)
    served = together(stream(1, count), 3_600_000.0, ((count, service), (count // 3, other)), direct=direct)
    assert 0 <= sum(one.busy_ms for one in served) <= 3_600_000 * (1 + 1e-9)
    assert all(one.total_ms >= 0 for one in served)


def test_what_waits_behind_slow_reads_waits_no_longer_than_they_do():
    # One queue: the mean wait is the same for all, whatever each then takes (Pollaczek and Khinchine).
    fast, slow = Service(mean_ms=4.0, variance=0.0), Service(mean_ms=12.0, variance=60.0)
    rng, span = stream(1, "two"), 10_000_000.0
    reads, writes = together(rng, span, ((100_000, slow), (200_000, fast)), direct=False)
    waits = reads.total_ms / 100_000 - 12, writes.total_ms / 200_000 - 4
    assert waits[0] == pytest.approx(waits[1], abs=0.1)
    both = mixed(((100_000, slow), (200_000, fast)))
    assert both.mean_ms == pytest.approx(20 / 3)
    assert waits[1] == pytest.approx(0.03 * (100 * 204 + 200 * 16) / 300 / (2 * (1 - 0.2)), rel=0.02)


def test_a_copy_that_waits_for_each_request_has_no_queue():
    service = Service(mean_ms=5.0, variance=0.0)
    (served,) = together(stream(1, "x"), 1_000.0, ((100, service),), direct=True)
    assert served == Served(total_ms=500, busy_ms=500)
