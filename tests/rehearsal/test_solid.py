import pytest

from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.workload import NOTHING, Work
from tests.rehearsal.examples import hour, nvme, solid, ssd

MIX = Mix(size=131_072, sequential=0.9, cached=0.0, stroke=0.3)


def writes(gigabytes: int) -> Work:
    return Work(writes=gigabytes * 10**9 // 131_072, reading=MIX, writing=MIX, direct=True)


def test_writes_slow_down_behind_the_cliff():
    times = []
    for amount in (10, 900):
        one = solid(nvme())
        one.live(hour(), writes(amount))
        times.append(one.counts.write_ms / one.counts.writes)
    assert times[1] > 1.5 * times[0]


def test_a_hot_drive_throttles_warns_and_counts_the_minutes():
    one, told = solid(nvme()), []
    for air in (70.0, 70.0, 70.0, 20.0, 20.0):
        one.live(hour(air=air), writes(50))
        told.append((one.throttled, one.told().log["critical_warning"]))
    assert told[2] == (True, 2)
    assert told[4] == (False, 0)
    log = one.told().log
    assert log["warning_temp_time"] + log["critical_comp_time"] >= 60


def test_below_its_threshold_of_spare_blocks_it_calls_itself_failing():
    one = solid(nvme(bad_blocks=365))
    told = one.told()
    assert (told.passed, told.log["critical_warning"], told.log["available_spare"]) == (False, 1, 8)
    assert solid(nvme(bad_blocks=360)).told().passed


def test_behind_ata_wear_is_told_as_what_is_left():
    one = solid(ssd(written_tb=50, rated_turns=1_000, amplification=2.0))
    rows = {row.number: row for row in one.told().rows}
    assert rows[202].value == 100 - 40
    assert rows[202].raw == 40


def test_the_controllers_busy_time_is_minutes_with_work_under_way_those_before_the_scenario_too():
    # NVM Express, log page 02h, bytes 96 to 111: minutes, from the drive's first day on.
    one = solid(nvme(written_tb=100, read_tb=150))
    begins = one.told().log["controller_busy_time"]
    assert begins > 1_000
    one.live(hour(), writes(900))
    assert one.told().log["controller_busy_time"] - begins == pytest.approx(one.busy_ms / 60_000, abs=1)
    assert one.busy_ms > 3 * 60_000


def test_heat_is_counted_to_the_minute_and_critical_heat_apart_from_it():
    # NVM Express, log page 02h: minutes from the warning limit on, and minutes from the critical one on.
    warm, hot = solid(nvme()), solid(nvme())
    for one, air in ((warm, 66.0), (hot, 100.0)):
        for _ in range(3):
            one.live(hour(air=air), writes(0))
    log = warm.told().log
    assert 120 < log["warning_temp_time"] < 180
    assert log["warning_temp_time"] % 60 != 0
    assert log["critical_comp_time"] == 0
    log = hot.told().log
    assert log["critical_comp_time"] > 150
    assert log["warning_temp_time"] + log["critical_comp_time"] <= 180


def test_a_refused_command_is_an_error_of_the_log_and_none_of_the_medium():
    one = solid(nvme(cycles=40))
    one.power_up()
    one.lose_power(2)
    log = one.told().log
    assert (log["num_err_log_entries"], log["media_errors"]) == (43, 0)
    assert [entry.count for entry in one.errors] == list(range(43, 27, -1))


def test_what_a_dying_block_took_with_it_fails_the_self_test_until_it_is_written_anew():
    for spec in (nvme(), ssd()):
        one = solid(spec)
        one.cells.losses = 20_000.0
        for _ in range(24 * 8):
            one.live(hour(), NOTHING)
        assert one.cells.media_errors == len(one.cells.lost) > 0
        one.test(extended=True)
        assert one.tests[0].passed is False
        assert one.tests[0].lba == min(one.cells.lost)
        assert one.errors[0].count == one.logged
        one.cells.losses = 0.0
        for _ in range(40):
            one.live(hour(), writes(100))
        assert not one.cells.lost
        one.test(extended=True)
        assert one.tests[0].passed
