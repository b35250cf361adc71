"""What a replay costs: ``pytest -m bench -s tests/replay``; each figure beside its goal and its floor."""

# ruff: noqa: T201  # a benchmark tells what it measured

import csv
import gzip
import resource
import time
from random import Random

import pytest

from diskwatch import analyser
from diskwatch.replay import replay
from tests.samples import DAY, HDD, NOON, NVME, read
from tests.trends.simulators import disk

pytestmark = pytest.mark.bench

ROWS = 1_000_000


@pytest.fixture(autouse=True)
def _only_when_asked(request):
    if "bench" not in request.config.getoption("-m"):
        pytest.skip("a benchmark: run with -m bench")


def test_a_million_rows_of_traffic(tmp_path):
    path = tmp_path / "traffic.csv"
    chance = Random(1)  # noqa: S311  # work, not secrets
    with path.open("w", encoding="utf-8") as file:
        file.write("time,serial,interval_s,reads,writes,read_bytes,write_bytes,read_ms,write_ms,busy_ms\n")
        for number in range(ROWS):
            at, serial = NOON + 300 * (number // 12), number % 12
            reads, size = chance.randrange(1, 6000), chance.choice((4096, 16384, 65536))
            spent = round(reads * 5 * chance.uniform(0.8, 1.2))
            file.write(f"{at},INV{serial},300,{reads},9,{reads * size},36864,{spent},18,250000\n")
    part, took, busy = _replayed(path)
    print(f"\n{ROWS:,} rows of traffic, two processes: {took:.1f} s (goal <= 30); {busy:.1f} s of processors")
    assert sum(drive.rows for drive in part.drives) == ROWS
    assert took <= 30


def test_the_open_daily_drive_data(shared):
    path = shared / "drive_series" / "daily_2013-04-10_2013-05-19.csv.gz"
    if not path.is_file():
        pytest.skip("the daily drive data of 2013 are not here")
    began = time.perf_counter()
    with gzip.open(path, "rt", encoding="utf-8", newline="") as file:
        rows = sum(1 for _ in csv.reader(file)) - 1
    floor = time.perf_counter() - began
    part, took, busy = _replayed(path)
    print(f"\n{rows:,} daily rows, two processes: {took:.1f} s (goal <= 10); {busy:.1f} s of processors")
    print(f"reading them alone, one process: {floor:.1f} s")
    assert sum(drive.rows for drive in part.drives) == rows
    assert took <= 10


def _replayed(path):
    """Replay with two processes: what came of it, seconds that passed, seconds of processors that it took.

    On a machine that others keep busy only the latter means anything.
    """
    before, began = _busy(), time.perf_counter()
    part = replay([path], jobs=2)
    return part, time.perf_counter() - began, _busy() - before


def _busy():
    used = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(one.ru_utime + one.ru_stime for one in used)


def test_a_drive_year_of_all_signals_from_day_values():
    hours = {"temperature": 35, "unsafe_power_offs": 0}
    turning = [
        read(
            NOON + day * DAY,
            HDD,
            pending_sectors=0,
            reallocated_sectors=0,
            crc_errors=0,
            offline_uncorrectable=0,
            reported_uncorrectable=0,
            command_timeouts=0,
            power_on_hours=24 * day,
            **hours,
        )
        for day in range(365)
    ]
    flash = [
        read(
            NOON + day * DAY,
            NVME,
            percentage_used=day // 30,
            available_spare=100,
            data_written=day * 10**11,
            media_errors=0,
            critical_warning=0,
            power_on_hours=24 * day,
            **hours,
        )
        for day in range(365)
    ]
    for name, passes in (("turning", turning), ("flash", flash)):
        took = min(_lived(passes) for _ in range(5))
        print(f"\na drive-year of day values, {name}: {1000 * took:.1f} ms (goal <= 50)")
        assert took <= 0.05


def _lived(passes):
    state, began = analyser.start(), time.process_time()
    for one in passes:
        state = analyser.advance(state, one).state
    return time.process_time() - began


def test_a_year_of_traffic_of_one_drive():
    days = list(disk.days(Random(1), 365, disk.VISIBLE, first=NOON // DAY))  # noqa: S311  # work, not secrets
    state, latency, began = analyser.start(), analyser.no_latency(), time.process_time()
    for rollups in days:
        day = (rollups[0].at - 300) // DAY
        step = analyser.take_in_traffic(state, latency, rollups, day=day, at=NOON, key="port")
        state, latency = step.state, step.latency
    took = time.process_time() - began
    count = sum(map(len, days))
    size = len(analyser.dump_latency(latency)) / 1000
    print(f"\n{count:,} roll-ups of a year, days closed and summed up: {1e6 * took / count:.1f} us each")
    print(f"what was learnt from them: {size:.0f} kB as text")
    assert took / count <= 30e-6
