from hypothesis import given, settings, strategies as st

from diskwatch.records import IoCounts
from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.workload import NOTHING, Work
from tests.rehearsal.examples import alone, hdd, hour, nvme, ssd


def work(reads=1_000, writes=500, size=16_384):
    mix = Mix(size=size, sequential=0.3, cached=0.3, stroke=0.3)
    return Work(reads=reads, writes=writes, reading=mix, writing=mix)


def test_an_hour_counts_as_one_and_its_work_reaches_the_kernels_counters():
    one = alone(hdd())
    one.live(hour(), work())
    assert one.hours == 1001
    counts = one.counts
    assert (counts.reads, counts.writes) == (1_000, 500)
    assert (counts.read_bytes, counts.write_bytes) == (1_000 * 16_384, 500 * 16_384)
    assert counts.read_ms > 0
    assert 0 < counts.busy_ms <= 3_600_000


def test_the_kernel_begins_its_totals_anew_at_a_start_and_the_drive_does_not():
    one = alone(nvme())
    one.live(hour(), work())
    one.power_up()
    assert one.counts == IoCounts(
        reads=0, writes=0, read_bytes=0, write_bytes=0, read_ms=0, write_ms=0, busy_ms=0
    )
    assert one.drive_written == 500 * 16_384
    assert one.appearances == 2


def test_power_that_goes_away_starts_the_drive_and_the_kernels_totals_anew():
    for spec in (hdd(unsafe=3, cycles=9), ssd(unsafe=3, cycles=9), nvme(unsafe=3, cycles=9)):
        one = alone(spec)
        one.live(hour(), work())
        one.lose_power(2)
        assert (one.unsafe, one.cycles, one.appearances) == (5, 11, 2)
        assert (one.counts.reads, one.counts.busy_ms) == (0, 0)
        assert one.read_commands == 1_000


def test_a_drive_that_sleeps_does_so_when_nobody_wants_it_and_wakes_for_work():
    one = alone(hdd(sleeps=True))
    slept = []
    for wanted in (NOTHING, NOTHING, work(), NOTHING):
        one.live(hour(), wanted)
        slept.append(one.asleep)
    assert slept == [False, True, False, True], "a start turns the platters"


def test_a_drive_does_no_more_than_it_has_time_for():
    one = alone(hdd())
    one.live(hour(), work(reads=10**7, writes=10**7))
    assert one.counts.reads < 10**6
    assert one.counts.busy_ms <= 3_600_000


@settings(max_examples=40)
@given(
    st.sampled_from(["hdd", "ssd", "nvme"]),
    st.lists(st.tuples(st.integers(0, 5_000), st.integers(0, 5_000)), min_size=2, max_size=12),
    st.integers(0, 1_000),
)
def test_counters_never_fall_and_bytes_agree_with_operations(kind, steps, seed):
    spec = {"hdd": hdd, "ssd": ssd, "nvme": nvme}[kind]()
    one = alone(spec, seed=seed)
    before = _counters(one)
    for place, (reads, writes) in enumerate(steps):
        one.live(hour(1_735_693_200 + place * 3600), work(reads, writes, 4_096))
        now = _counters(one)
        assert all(now[name] >= before[name] for name in before), (before, now)
        assert one.counts.read_bytes == one.counts.reads * 4_096
        assert one.counts.write_bytes == one.counts.writes * 4_096
        before = now


def _counters(one) -> dict[str, int]:
    counts, told = one.counts, one.told()
    gauges = {194, 197, 198, 202, 232}
    return {
        **{name: getattr(counts, name) for name in ("reads", "writes", "read_ms", "write_ms", "busy_ms")},
        **{str(row.number): row.raw for row in told.rows if row.number not in gauges},
        **{
            name: value
            for name, value in told.log.items()
            if name not in {"temperature", "available_spare", "critical_warning"}
        },
        "hours": told.hours,
    }
