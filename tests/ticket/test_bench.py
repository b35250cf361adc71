"""A ticket of a drive that was watched for ten years: ``pytest -m bench -s tests/ticket/test_bench.py``."""

# ruff: noqa: T201  # a benchmark tells what it measured

import json
import random
import resource
import statistics
import time
from dataclasses import replace

import pytest

from diskwatch.history.writer import History
from tests.cli.run import run
from tests.history.years import _fives, upkept
from tests.samples import DAY, NOON, NVME, read
from tests.ticket.lives import live
from tests.ticket.test_document import sound

YEARS = 10
_RUNS = 7
COUNTERS = ("pending_sectors", "reallocated_sectors", "crc_errors", "command_timeouts", "unsafe_power_offs")
ANSWER = "smartctl 7.3 (invented)\n" + "".join(
    f"{number:3} Invented_Attribute 0x0032 100\n" for number in range(900)
)


def _passes(drive, noise):
    """Two passes a day for ten years, the last quarter every half hour; errors a few times a year."""
    counts = dict.fromkeys(COUNTERS, 0)
    for day in range(round(YEARS * 365.25)):
        for name in COUNTERS:
            counts[name] += noise.randrange(1, 9) if noise.random() < 0.012 else 0
        recent = day > YEARS * 365.25 - 91
        for part in range(48 if recent else 2):
            at = NOON + day * DAY + part * (1_800 if recent else 21_600)
            found = {**counts, "power_on_hours": day * 24 + part // 2, "temperature": noise.randrange(30, 45)}
            yield replace(read(at, drive, **found), answer=ANSWER)


@pytest.mark.bench
def test_a_ticket_of_ten_years_takes_at_most_400_ms_from_the_shell(tmp_path):
    noise = random.Random(1)  # noqa: S311  # the same life each time
    now = NOON + round(YEARS * 365.25) * DAY
    weeks = (NOON, *range(now - 84 * DAY, now, 7 * DAY))
    with History.in_memory() as history:
        # In memory first: thirty thousand commits would each wait for the disk.
        known = live(history, _passes(NVME, noise), drive=NVME)
        with history._writing() as connection:
            connection.executemany(
                "INSERT OR REPLACE INTO io_five VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                [row for week in weeks for row in _fives((known,), week, noise)],
            )
        upkept(history, now)
        (tmp_path / "state").mkdir()
        history._db.conn.execute("VACUUM INTO ?", (str(tmp_path / "state" / "history.db"),))
    took = []
    begun = resource.getrusage(resource.RUSAGE_CHILDREN)
    for _ in range(_RUNS):
        started = time.perf_counter()
        made = run("ticket", "--state", tmp_path / "state")
        took.append(time.perf_counter() - started)
        assert made.code == 0
    ended = resource.getrusage(resource.RUSAGE_CHILDREN)
    spent = (ended.ru_utime + ended.ru_stime - begun.ru_utime - begun.ru_stime) / _RUNS
    told = sound(json.loads(made.out))
    changes = sum(len(one["changes"] or ()) for one in told["signals"])
    clock, size = statistics.median(took) * 1000, len(made.out) // 1024
    print(
        f"\nticket of ten years: {spent * 1000:.0f} ms of processor time, {clock:.0f} ms by the clock (median)"
    )
    print(f"{size} KiB, {len(told['events'])} events, {changes} changes")
    assert told["thinned"] is None
    # One process, one thread: on a machine with nothing else to do its processor time is what the clock shows.
    assert spent <= 0.4
