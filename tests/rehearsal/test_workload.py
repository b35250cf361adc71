import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.workload import BLOCK, NOTHING, Workload, is_on, limited
from diskwatch.units import DAY

MONDAY = 20_094 * DAY  # 2025-01-06
SATURDAY = MONDAY + 5 * DAY


def workload(habit="server", *, load=1.0, seed=1):
    return Workload(stream(seed, "work"), habit, load=load, surface=10**12)


def total(work: Workload, begin: int, hours: int, *, away=False) -> int:
    spans = (work.span(begin + hour * 3600, 3600, away=away) for hour in range(hours))
    return sum(one.reads + one.writes for one in spans)


def test_an_office_machine_is_off_at_night_on_weekends_and_on_holidays():
    assert is_on("office", MONDAY + 10 * 3600, away=False)
    assert not is_on("office", MONDAY + 22 * 3600, away=False)
    assert not is_on("office", SATURDAY + 10 * 3600, away=False)
    assert not is_on("office", MONDAY + 10 * 3600, away=True)
    assert is_on("server", SATURDAY + 3 * 3600, away=True)


def test_people_work_by_day_and_in_the_week():
    day = night = weekend = 0
    for seed in range(30):
        day += total(workload(seed=seed), MONDAY + 9 * 3600, 8)
        night += total(workload(seed=seed), MONDAY, 8)
        weekend += total(workload(seed=seed), SATURDAY + 9 * 3600, 8)
    assert day > 1.8 * night
    assert day > 1.5 * weekend
    assert total(workload(), MONDAY, 24, away=True) < 0.2 * total(workload(), MONDAY, 24)


def test_habits_change_about_twice_a_year():
    work, seen = workload(), set()
    for hour in range(10 * 365 * 24):
        work.span(MONDAY + hour * 3600, 3600, away=False)
        seen.add(tuple(work._weights))
    assert 10 <= len(seen) <= 35  # 21.5 changes in ten years in the mean


def test_a_backup_reads_the_source_writes_the_target_and_comes_to_an_end():
    for target in (False, True):
        work = workload(load=0.0)
        work.plan_backup(whole=True, target=target)
        spans = [work.span(MONDAY + hour * 3600, 3600, away=False) for hour in range(24)]
        moved = sum(one.write_bytes if target else one.read_bytes for one in spans)
        assert 0.2 * 10**12 < moved < 0.4 * 10**12
        assert all(one.direct for one in spans if one is not NOTHING)
        assert spans[-1] == NOTHING


def test_a_backup_goes_over_the_drive_from_its_beginning_and_meets_each_place_once():
    work = workload(load=0.0)
    work.plan_backup(whole=True, target=False)
    reached = 0.0
    for hour in range(24):
        one = work.span(MONDAY + hour * 3600, 3600, away=False)
        if one.reads:
            begin, end = one.reading.reach
            assert begin == pytest.approx(reached)
            assert end - begin == pytest.approx(one.read_bytes / 10**12)
            reached = end
    assert 0.2 < reached < 0.4


def test_reads_and_writes_have_sizes_of_their_own():
    work = workload()
    spans = [work.span(MONDAY + hour * 3600, 3600, away=False) for hour in range(24 * 30)]
    apart = sum(one.reading.size != one.writing.size for one in spans if one.reads and one.writes)
    assert apart > 0.9 * len(spans)


@given(st.integers(0, 10_000), st.floats(0, 50), st.sampled_from(["office", "home", "studio", "server"]))
def test_bytes_and_operations_agree(seed, load, habit):
    work = workload(habit, load=load, seed=seed)
    for hour in range(12):
        one = work.span(MONDAY + hour * 3600, 3600, away=False)
        for count, size, amount in (
            (one.reads, one.reading.size, one.read_bytes),
            (one.writes, one.writing.size, one.write_bytes),
        ):
            assert count >= 0
            assert amount == count * size
            assert size % BLOCK == 0
            assert (amount > 0) == (count > 0)


def test_what_a_drive_has_no_time_for_is_left_undone():
    work = workload(load=10.0).span(MONDAY + 10 * 3600, 3600, away=False)
    assert limited(work, 1.0) is work
    assert limited(work, 0.5).reads == pytest.approx(work.reads / 2, abs=1)
