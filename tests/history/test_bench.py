"""What the history costs, for invented but typical drives: run apart, with ``-m bench -s``."""

# ruff: noqa: T201  # a benchmark tells what it measured

import os
import random
import re
import sqlite3
import statistics
import subprocess
import tempfile
import time
from collections.abc import Callable, Iterator
from contextlib import closing, contextmanager
from functools import partial
from pathlib import Path

import pytest

from diskwatch.history.reader import Past
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from tests.history.examples import DAY
from tests.history.test_questions import LARGE
from tests.history.years import (
    BEGIN,
    FOLLOWED,
    MOVING,
    STILL,
    WEEK,
    Took,
    a_round_of_all,
    a_week,
    admitted,
    spans,
    timed,
    upkept,
)

pytestmark = pytest.mark.bench

YEARS = 10


@pytest.fixture(autouse=True, scope="module")
def _only_when_asked(request):
    if "bench" not in request.config.getoption("-m"):
        pytest.skip("a benchmark: run with -m bench")


def _written() -> int:
    lines = Path("/proc/self/io").read_text().splitlines()
    return int(dict(line.split(": ") for line in lines)["wchar"])


@contextmanager
def _disk(folder: Path) -> Iterator[tuple[Path, Callable[[], int | None]]]:
    """A small file system of its own, and what was written to its device; a plain folder without root."""
    image, place = folder / "disk", folder / "mounted"
    place.mkdir()
    with image.open("wb") as file:
        file.truncate(400 << 20)
    commands = (["mkfs.ext4", "-q", "-F", str(image)], ["mount", "-o", "loop", str(image), str(place)])
    if any(subprocess.run(one, capture_output=True, check=False).returncode for one in commands):
        yield place, lambda: None
        return
    try:
        device = subprocess.run(
            ["findmnt", "-n", "-o", "SOURCE", str(place)], capture_output=True, text=True, check=True
        ).stdout.strip()
        stat = Path("/sys/block") / Path(device).name / "stat"

        def written() -> int:
            subprocess.run(["sync", "-f", str(place)], check=True)
            return int(stat.read_text().split()[6]) * 512  # sectors written (Documentation/block/stat.rst)

        yield place, written
    finally:
        subprocess.run(["umount", "-l", str(place)], check=False)


def test_a_day_of_six_drives_writes_at_most_ten_mebibytes(tmp_path):
    """Two days after sixteen weeks, upkeep every hour: so what was thinned and condensed is in it."""
    noise = random.Random(1)  # noqa: S311  # figures, not secrets
    with _disk(tmp_path) as (place, device), History.open(place / "state") as history:
        drives = admitted(history)
        history.record(a_round_of_all(drives, BEGIN, noise))
        for week in range(16):
            a_week(history, drives, BEGIN + week * WEEK, noise)
        now = BEGIN + 16 * WEEK
        upkept(history, now)
        for day in range(4):  # the first two fill what a history of some days has: minutes, free pages, a log
            if day == 2:
                begun, on_device = _written(), device()
            for half_hour in range(48):
                at = now + day * DAY + half_hour * 1800
                history.record(a_round_of_all(drives, at, noise))
                for quarter in (at, at + 900):
                    history.add_traffic(spans(drives, quarter, noise))
                if half_hour % 2 == 0:
                    upkept(history, at)
        written, end = (_written() - begun) / 2, device()
    print(f"\n{written / 2**20:.1f} MiB a day by /proc/self/io")
    if on_device is not None and end is not None:
        print(f"{(end - on_device) / 2 / 2**20:.1f} MiB a day on the device, the file system's own included")
    assert written <= 10 * 2**20


_WRITTEN = {
    "pass": "SELECT * FROM pass WHERE at = ?",
    "fresh": "SELECT * FROM fresh WHERE at = ?",
    "latest": "SELECT * FROM latest WHERE since = ? OR evidence IS NOT NULL",
    "drive": "SELECT * FROM drive WHERE passed_at = ?",
    "analyser_state": "SELECT * FROM analyser_state WHERE at = ?",
    "last_reading": "SELECT * FROM last_reading WHERE at = ?",
}
"""All rows that a round writes where no day begins with it: what moved, and evidence, which always does."""


def _costs(deed: Callable[[], object]) -> tuple[float, float, float]:
    """By the clock, the same without waiting for a processor, and of the processor, in milliseconds."""

    def counted() -> float:
        begun = time.process_time()
        deed()
        return time.process_time() - begun

    own, took = timed(counted)
    return took.wall * 1000, took.own * 1000, own * 1000


def _bare(twin: sqlite3.Connection, written: dict[str, list[tuple[object, ...]]]) -> None:
    twin.execute("BEGIN")
    for table, same in written.items():
        marks = ", ".join("?" * len(same[0]))
        twin.executemany(f"INSERT OR REPLACE INTO {table} VALUES ({marks})", same)  # noqa: S608  # our own
    twin.commit()


def test_storing_a_round_takes_less_than_three_times_the_bare_library(tmp_path):
    """The very rows of it by raw ``executemany`` into the same tables, on the same disk, one after the other.

    The bare library is handed whole rows with their blobs packed, keeps no reference between tables in view,
    and need not find out what is news; both wait for the disk once.
    """
    noise = random.Random(3)  # noqa: S311  # figures, not secrets
    ours, bare = [], []
    with History.open(tmp_path / "a") as history, History.open(tmp_path / "b") as other:
        drives, _ = admitted(history), admitted(other)
        connection, twin = history._db.conn, other._db.conn
        twin.execute("PRAGMA foreign_keys = OFF")
        for number in range(140):
            round_ = a_round_of_all(drives, BEGIN + number * 600, noise)
            before = connection.total_changes
            costs = _costs(partial(history.record, round_))
            changes = connection.total_changes - before
            written = {
                table: connection.execute(sql, (round_.at,)).fetchall() for table, sql in _WRITTEN.items()
            }
            twins = _costs(partial(_bare, twin, written))
            if number >= 20:
                assert changes == sum(map(len, written.values()))
                ours.append(costs)
                bare.append(twins)
    mine, raw = ([statistics.median(one) for one in zip(*each, strict=True)] for each in (ours, bare))
    for what, own, floor in zip(
        ("by the clock", "of work and disk", "of the processor"), mine, raw, strict=True
    ):
        print(f"\na round takes {own:.2f} ms {what}, the bare library {floor:.2f} ms: {own / floor:.1f} times")
    # On a machine with more work than processors the longer of two waits more often for one.
    assert mine[1] < 3 * raw[1]


@pytest.fixture(scope="module")
def ten_years() -> Iterator[tuple[Path, int]]:
    noise = random.Random(2)  # noqa: S311  # figures, not secrets
    end = BEGIN + YEARS * 365 // 7 * WEEK
    held: list[Took] = []
    with tempfile.TemporaryDirectory(prefix="diskwatch-years-") as made:
        folder = Path(made)
        with History.open(folder) as history:
            history._db.conn.execute("PRAGMA synchronous = OFF")  # years in minutes; what is stored is the same
            drives = admitted(history)
            history.record(a_round_of_all(drives, BEGIN, noise))
            with history._writing() as connection:
                file_past_days(connection, BEGIN // DAY + 1)
            for begin in range(BEGIN, end, WEEK):
                # All of it would take an hour on a slow machine; the last 14 weeks of traffic stand in full.
                traffic = (begin - BEGIN) // WEEK % 8 == 0 or begin >= end - 14 * WEEK
                a_week(history, drives, begin, noise, traffic=traffic)
                held += upkept(history, begin + WEEK + 3_600)
            history._db.conn.execute("PRAGMA synchronous = FULL")
            for quarter in range(end - 8 * DAY, end, 900):
                history.add_traffic(spans(drives, quarter, noise))
            held += upkept(history, end)
            history.record(a_round_of_all(drives, end, noise))
        print(f"\nten years of bites, {_told(held)}")
        yield folder, end


def test_ten_years_of_six_drives_take_at_most_a_hundred_and_fifty_mebibytes(ten_years):
    folder, _ = ten_years
    size = (folder / HISTORY).stat().st_size / 2**20
    with closing(sqlite3.connect(folder / HISTORY)) as connection:
        (free,) = connection.execute("PRAGMA freelist_count").fetchone()
        counted = {
            table: connection.execute(f"SELECT count(*) FROM {table}").fetchone()[0]  # noqa: S608  # our own
            for table in (*LARGE, "pass_day", "io_day", "kept_state")
        }
    print(f"\n{size:.0f} MiB, {free * 4096 / 2**20:.0f} of them free pages; {counted}")
    assert size <= 150


def _told(took: list[Took]) -> str:
    """How long things took by the clock, and how long but for waiting for a processor."""
    found = []
    for name, each in (
        ("", [one.wall for one in took]),
        ("without waiting for a processor ", [one.own for one in took]),
    ):
        median, late, last = (1000 * sorted(each)[(len(each) - 1) * part // 1000] for part in (500, 990, 1000))
        found.append(f"{name}{median:.1f} ms in the median, {late:.1f} at 99 %, {last:.1f} at most")
    return f"{len(took):,}: {'; '.join(found)}"


def _flush(file: int) -> None:
    os.pwrite(file, os.urandom(4096), 0)
    os.fdatasync(file)


def _compute() -> None:
    begun = time.thread_time()
    while time.thread_time() - begun < 0.0015:
        pass


def test_a_bite_holds_the_writer_less_than_fifty_milliseconds(ten_years, tmp_path):
    """The last weeks once more, on a disk that each commit waits for, beside what nobody can be quicker than.

    This is a bare flush of four kibibytes on the same disk, and 1.5 ms of computing alone: on a machine with
    more work than processors even that takes as long as others are let run.
    """
    folder, end = ten_years
    noise = random.Random(4)  # noqa: S311  # figures, not secrets
    other = tmp_path / "state"
    other.mkdir()
    (other / HISTORY).write_bytes((folder / HISTORY).read_bytes())
    flushes, computing = [], []
    with History.open(other) as history, (tmp_path / "bare").open("wb", buffering=0) as bare:
        a_week(history, history.known(), end, noise)
        os.write(bare.fileno(), bytes(4096))
        os.fsync(bare.fileno())
        held = upkept(history, end + WEEK + 3_600)
        for _ in range(200):
            flushes.append(timed(partial(_flush, bare.fileno()))[1])
            computing.append(timed(_compute)[1])
    print(f"\nbites, {_told(held)}\nbare flushes, {_told(flushes)}\n1.5 ms of computing, {_told(computing)}")
    # The first commit in a log that begins anew flushes its head, and meets the disk as it is.
    floor = max(one.own for one in flushes)
    assert max(one.own for one in held) < 0.05 + floor
    assert sorted(one.wall for one in held)[len(held) * 99 // 100] < 0.05 + floor


def test_a_history_of_ten_years_is_ready_within_a_second(ten_years):
    folder, _ = ten_years
    begun = time.perf_counter()
    with History.open(folder) as history:
        assert history.known()
        assert history.states()
        took = time.perf_counter() - begun
    print(f"\nready after {took * 1000:.0f} ms")
    assert took < 1


def test_every_question_to_ten_years_is_answered_within_fifty_milliseconds_from_an_index(ten_years):
    folder, end = ten_years
    month, year = end - 30 * DAY, end - 365 * DAY
    asked: dict[str, Callable[[Past], object]] = {
        "bays": lambda past: past.bays(end),
        "find": lambda past: past.find("INVENTED-3"),
        "day book, newest 500": lambda past: past.day_book(limit=500),
        "day book, a month": lambda past: past.day_book(since=month),
        "day book, a kind that never came": lambda past: past.day_book(kinds=["call"], limit=50) == (),
        "passes, a month": lambda past: past.passes(3, month),
        "passes, newest 100": lambda past: past.passes(3, limit=100),
        "passes by day, a year": lambda past: past.pass_days(3, year),
        "passes by day, ever": lambda past: past.pass_days(3),
        "moving value, ever": lambda past: past.series(3, MOVING[1]),
        "moving value, a month": lambda past: past.series(3, MOVING[1], month),
        "still value, ever": lambda past: past.series(3, STILL[0]),
        "evidence, a year": lambda past: past.evidence(3, FOLLOWED[0], year),
        "evidence, ever": lambda past: past.evidence(3, FOLLOWED[0]),
        "traffic, a day": lambda past: past.traffic(3, end - DAY, end),
        "roll-ups, a day": lambda past: past.rollups(3, end - DAY, end),
        "load classes, a month": lambda past: past.class_days(3, month // DAY, end // DAY),
        "attributes": lambda past: past.attributes(3),
        "state": lambda past: past.state(3),
    }
    slow, scanned = {}, {}
    with Past.open(folder) as past:
        for name, ask in asked.items():
            took = []
            for _ in range(5):
                start = time.perf_counter()
                assert ask(past)
                took.append(time.perf_counter() - start)
            print(f"{name}: {min(took) * 1000:.1f} ms")
            if min(took) > 0.05:
                slow[name] = took
            opened = past._current().connection
            statements: list[str] = []
            opened.set_trace_callback(statements.append)
            ask(past)
            opened.set_trace_callback(None)
            for sql in statements:
                if sql.startswith("SELECT"):
                    plan = [row[3] for row in opened.execute(f"EXPLAIN QUERY PLAN {sql}")]
                    if any(
                        re.search(rf"SCAN ({'|'.join(LARGE)}|pass_day|io_five|io_day)\b", step) for step in plan
                    ):
                        scanned[name] = plan
    assert slow == {}
    assert scanned == {}
