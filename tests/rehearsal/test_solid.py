from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.workload import Work
from tests.rehearsal.examples import hour, nvme, solid, ssd

MIX = Mix(size=131_072, sequential=0.9, cached=0.0, stroke=0.3)


def writes(gigabytes: int) -> Work:
    return Work(writes=gigabytes * 10**9 // 131_072, write_size=131_072, mix=MIX, direct=True)


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
    assert one.told().log["warning_temp_time"] >= 60


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


def test_the_controllers_busy_time_is_whole_minutes_with_work_under_way():
    one = solid(nvme())
    one.live(hour(), writes(900))
    assert one.told().log["controller_busy_time"] == int(one.life_busy_ms // 60_000) > 3
