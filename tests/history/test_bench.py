"""What the history costs, for invented but typical drives: run apart, with ``-m bench -s``."""

# ruff: noqa: T201  # a benchmark tells what it measured

import random
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from diskwatch.history import rows
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import Attribute, CallWord, DriveRound, Entry, KnownDrive, SignalKind, Value
from tests.history.examples import (
    DAY,
    NOON,
    a_call,
    a_drive,
    a_part,
    a_pass,
    a_place,
    a_round,
    a_span,
    a_value,
)

pytestmark = pytest.mark.bench

DRIVES = 6
STILL = tuple(f"still-{number}" for number in range(20))
MOVING = tuple(f"moving-{number}" for number in range(8))
FOLLOWED = STILL[:12]
YEARS = 10
MIDNIGHT = NOON // DAY * DAY


@pytest.fixture(autouse=True)
def _only_when_asked(request):
    if "bench" not in request.config.getoption("-m"):
        pytest.skip("a benchmark: run with -m bench")


def _admitted(history: History) -> tuple[KnownDrive, ...]:
    return tuple(
        history.admit(a_drive(f"INVENTED-{n}", f"/dev/sd{n}"), a_place(f"/dev/sd{n}"), MIDNIGHT)
        for n in range(DRIVES)
    )


def _read_values(noise: random.Random) -> tuple[Value, ...]:
    still = [a_value(name, 0) for name in STILL]
    moving = [a_value(name, noise.randrange(2**40), "opaque", SignalKind.GAUGE) for name in MOVING]
    return (*still, *moving)


def _part(known: KnownDrive, at: int, noise: random.Random) -> DriveRound:
    table = tuple(
        Attribute(
            number=number,
            name=f"Invented_Attribute_{number}",
            value=100,
            worst=100,
            threshold=0,
            prefail=False,
            raw=str(noise.randrange(2**30)) if number < 9 else "0",
        )
        for number in range(1, 26)
    )
    state = {name: [noise.random() for _ in range(8)] for name in FOLLOWED}
    return a_part(
        replace(known, place=a_place(known.place.device)),
        a_pass(at, *_read_values(noise), attributes=table),
        state=str(state),
        evidence={name: noise.random() for name in FOLLOWED},
        call=a_call(CallWord.KEEP, MIDNIGHT),
    )


def _written() -> int:
    lines = Path("/proc/self/io").read_text().splitlines()
    return int(dict(line.split(": ") for line in lines)["wchar"])


def test_a_day_of_six_drives_writes_at_most_ten_mebibytes(folder):
    """Rounds every half hour, traffic committed every quarter; the last of sixteen days, logs folded in."""
    noise = random.Random(1)  # noqa: S311  # figures, not secrets
    with History.open(folder) as history:
        drives = _admitted(history)
        took = 0.0
        for day in range(16):
            begun = _written()
            for half_hour in range(48):
                at = MIDNIGHT + day * DAY + half_hour * 1800
                round_ = a_round(*(_part(known, at, noise) for known in drives), at=at)
                start = time.perf_counter()
                history.record(round_)
                took += time.perf_counter() - start
                for quarter in (at, at + 900):
                    history.add_traffic(
                        [
                            a_span(
                                known.number,
                                quarter + ten * 10,
                                read_bytes=noise.randrange(10**8),
                                write_bytes=noise.randrange(10**8),
                                busy_ms=noise.randrange(10_000),
                            )
                            for ten in range(90)
                            for known in drives
                        ]
                    )
            written = (_written() - begun) / 2**20
    print(f"\n{written:.1f} MiB written that day; a round takes {took / 16 / 48 * 1000:.1f} ms")
    assert written <= 10


@pytest.fixture
def ten_years(folder):
    """Ten years, thinned as they are meant to be: moving values every pass for 90 days, then daily."""
    noise = random.Random(2)  # noqa: S311  # figures, not secrets
    end = MIDNIGHT + YEARS * 365 * DAY
    with History.open(folder) as history:
        drives = _admitted(history)
        history.record(a_round(*(_part(known, MIDNIGHT, noise) for known in drives), at=MIDNIGHT))
        with history._writing() as connection:
            series = {
                row[1]: row[0] for row in connection.execute("SELECT number, drive || signal FROM series")
            }
            connection.executemany(
                "INSERT OR IGNORE INTO pass VALUES (?, ?, 'read', 0, 900, NULL)",
                ((known.number, at) for known in drives for at in range(MIDNIGHT, end, 1800)),
            )
            days = [*range(MIDNIGHT, end - 90 * DAY, DAY), *range(end - 90 * DAY, end, 1800)]
            connection.executemany(
                "INSERT OR IGNORE INTO value VALUES (?, ?, ?, NULL)",
                (
                    (series[f"{known.number}{name}"], at, noise.randrange(2**40))
                    for known in drives
                    for name in MOVING
                    for at in days
                ),
            )
            connection.executemany(
                "INSERT INTO evidence VALUES (?, ?, ?)",
                (
                    (series[f"{known.number}{name}"], day, noise.random())
                    for known in drives
                    for name in FOLLOWED
                    for day in range(MIDNIGHT // DAY + 1, end // DAY)
                ),
            )
            connection.executemany(
                "INSERT INTO io_minute (slot, span_ms, reads, writes, read_bytes, write_bytes, read_ms,"
                " write_ms, busy_ms) VALUES (?, 60000, ?, ?, ?, ?, ?, ?, ?)",
                (
                    (rows.slot(at, known.number), *(noise.randrange(2**24) for _ in range(7)))
                    for at in range(end - 90 * DAY, end, 60)
                    for known in drives
                ),
            )
        history.note(
            *(
                Entry(at=at, drive=known.number, kind="rise", text="8 sectors more wait.", data={"rise": 8})
                for at in range(MIDNIGHT, end, DAY)
                for known in drives
            )
        )
    return folder, end


def test_every_question_to_ten_years_is_answered_within_fifty_milliseconds(ten_years):
    folder, end = ten_years
    size = (folder / HISTORY).stat().st_size / 2**20
    print(f"\n{size:.0f} MiB")
    month, year = end - 30 * DAY, end - 365 * DAY
    asked: dict[str, Callable[[Past], object]] = {
        "bays": lambda past: past.bays(end),
        "find": lambda past: past.find("INVENTED-3"),
        "day book, newest 500": lambda past: past.day_book(limit=500),
        "day book, a month": lambda past: past.day_book(since=month),
        "day book, a kind that never came": lambda past: past.day_book(kinds=["call"], limit=50) == (),
        "passes, a month": lambda past: past.passes(3, month),
        "passes, newest 100": lambda past: past.passes(3, limit=100),
        "moving value, ever": lambda past: past.series(3, MOVING[0]),
        "still value, ever": lambda past: past.series(3, STILL[0]),
        "evidence, a year": lambda past: past.evidence(3, FOLLOWED[0], year),
        "evidence, ever": lambda past: past.evidence(3, FOLLOWED[0]),
        "traffic, a day": lambda past: past.traffic(3, end - DAY, end),
        "attributes": lambda past: past.attributes(3),
        "state": lambda past: past.state(3),
    }
    slow = {}
    start = time.perf_counter()
    with Past.open(folder) as past:
        print(f"open: {(time.perf_counter() - start) * 1000:.1f} ms")
        for name, ask in asked.items():
            took = []
            for _ in range(3):
                start = time.perf_counter()
                assert ask(past)
                took.append(time.perf_counter() - start)
            print(f"{name}: {min(took) * 1000:.1f} ms")
            if min(took) > 0.05:
                slow[name] = took
    assert slow == {}
