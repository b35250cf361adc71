"""Years of six invented drives, written week by week as the watch leaves them, thinned by the real code."""

import random
import sqlite3
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import TypeVar

from diskwatch.history import packing, rows
from diskwatch.history.probes import times_packed
from diskwatch.history.writer import History
from diskwatch.records import (
    Attribute,
    CallWord,
    DriveRound,
    Entry,
    IoSpan,
    KnownDrive,
    ProbeDay,
    Round,
    SignalKind,
    Value,
)
from diskwatch.service.probing import READS, REQUESTS
from diskwatch.trends.load import class_days
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

DRIVES = 6
WEEK = 7 * DAY
BEGIN = NOON // WEEK * WEEK
STILL = tuple(f"still-{number}" for number in range(20))
MOVING = ("temperature", *(f"moving-{number}" for number in range(7)))
FOLLOWED = STILL[:12]
FORECAST = ("percentage-used", "read-latency", "write-latency")
HEARD = ("kernel-io-errors", "link-resets", "kernel-timeouts")
_LOADS = ((0.2, 4096), (0.5, 16384), (2.0, 4096), (5.0, 65536), (9.0, 131072), (30.0, 16384), (90.0, 262144))
"""Operations a second and their size: what an invented workstation does by turns."""


def admitted(history: History) -> tuple[KnownDrive, ...]:
    return tuple(
        history.admit(a_drive(f"INVENTED-{n}", f"/dev/sd{n}"), a_place(f"/dev/sd{n}"), BEGIN)
        for n in range(DRIVES)
    )


def moving_value(name: str, noise: random.Random) -> Value:
    if name == "temperature":
        return a_value(name, noise.randrange(30, 45), "celsius", SignalKind.GAUGE)
    return a_value(name, noise.randrange(2**40), "opaque", SignalKind.GAUGE)


def a_rounds_part(known: KnownDrive, at: int, noise: random.Random) -> DriveRound:
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
    values = (*(a_value(name, 0) for name in STILL), *(moving_value(name, noise) for name in MOVING))
    return a_part(
        replace(known, place=a_place(known.place.device)),
        a_pass(at, *values, attributes=table),
        state=a_state(noise),
        evidence={name: noise.random() for name in FOLLOWED},
        call=a_call(CallWord.KEEP, BEGIN),
    )


def a_state(noise: random.Random) -> str:
    return str({name: [noise.random() for _ in range(8)] for name in FOLLOWED})


def a_round_of_all(drives: tuple[KnownDrive, ...], at: int, noise: random.Random) -> Round:
    return a_round(*(a_rounds_part(known, at, noise) for known in drives), at=at)


def spans(drives: tuple[KnownDrive, ...], begin: int, noise: random.Random) -> list[IoSpan]:
    """A quarter of an hour by ten seconds."""
    return [_span(known.number, begin + ten * 10, 10, noise) for ten in range(1, 91) for known in drives]


def _span(drive: int, at: int, seconds: int, noise: random.Random) -> IoSpan:
    a_second, size = _LOADS[noise.randrange(len(_LOADS))]
    reads = round(a_second * seconds * noise.random())
    writes = round(a_second * seconds * noise.random())
    return a_span(
        drive,
        at,
        float(seconds),
        reads=reads,
        writes=writes,
        read_bytes=reads * size,
        write_bytes=writes * size,
        read_ms=round(reads * noise.lognormvariate(1.5, 0.5)),
        write_ms=round(writes * noise.lognormvariate(0.5, 0.5)),
        busy_ms=noise.randrange(seconds * 500),
    )


def a_week(
    history: History, drives: tuple[KnownDrive, ...], begin: int, noise: random.Random, *, traffic: bool = True
) -> None:
    """What a week of watching leaves, but for minutes, of which only the last seven days would stay.

    Without traffic of its own it takes over the histograms that the week before was condensed to.
    """
    with history._writing() as connection:
        series = {row[1]: row[0] for row in connection.execute("SELECT number, drive || signal FROM series")}
        connection.executemany(
            "INSERT OR IGNORE INTO pass (drive, at, outcome, exit_bits, took_ms) VALUES (?, ?, 'read', 0, 900)",
            ((known.number, at) for known in drives for at in range(begin, begin + WEEK, 1800)),
        )
        connection.executemany(
            "INSERT OR IGNORE INTO value (series, at, value) VALUES (?, ?, ?)",
            (
                (series[f"{known.number}{name}"], at, moving_value(name, noise).value)
                for known in drives
                for name in MOVING
                for at in range(begin, begin + WEEK, 1800)
            ),
        )
        connection.executemany(
            "INSERT OR IGNORE INTO evidence VALUES (?, ?, ?)",
            (
                (series[f"{known.number}{name}"], day, noise.random())
                for known in drives
                for name in FOLLOWED
                for day in range(begin // DAY, (begin + WEEK) // DAY)
            ),
        )
        connection.executemany(
            "INSERT OR IGNORE INTO kept_state (drive, at, packed) VALUES (?, ?, ?)",
            [(known.number, begin + WEEK - 1800, packing.packed(a_state(noise))) for known in drives],
        )
        _what_is_worked_out(connection, drives, begin, noise)
        if traffic:
            connection.executemany(
                "INSERT OR REPLACE INTO io_five VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                _fives(drives, begin, noise),
            )
        else:
            connection.execute(
                "INSERT OR IGNORE INTO io_day"
                " SELECT drive, day + 7, load_class, direction, rollups, operations, histogram"
                " FROM drive JOIN io_day ON drive = number WHERE day >= ? AND day < ?",
                (begin // DAY - 7, begin // DAY),
            )
    history.note(
        *(
            Entry(at=at, drive=known.number, kind="rise", text="8 sectors more wait.", data={"rise": 8})
            for at in range(begin, begin + WEEK, DAY)
            for known in drives
        )
    )


def _what_is_worked_out(
    connection: sqlite3.Connection, drives: tuple[KnownDrive, ...], begin: int, noise: random.Random
) -> None:
    """Forecasts of each week, the probes of its days, and the one row a drive of what is rewritten."""
    connection.executemany(
        "INSERT OR REPLACE INTO forecast VALUES (?, ?, ?, 100.0, 'drive', ?, ?, 0.8, NULL, NULL)",
        (
            (known.number, signal, begin // DAY, 900 * noise.random(), 900 + 900 * noise.random())
            for known in drives
            for signal in FORECAST
        ),
    )
    connection.executemany(
        "INSERT OR REPLACE INTO probe VALUES (?, ?, ?, 1800, ?)",
        (
            (known.number, at, noise.randrange(4), times_packed(_a_probe(at, noise)))
            for known in drives
            for at in range(begin, begin + WEEK, DAY)
        ),
    )
    connection.executemany(
        "INSERT OR REPLACE INTO latency_state VALUES (?, ?, ?)",
        [(known.number, begin // DAY, packing.packed(a_state(noise) * 40)) for known in drives],
    )
    connection.executemany(
        "INSERT OR REPLACE INTO answer VALUES (?, ?, 'keep', ?)",
        [(known.number, begin, packing.packed("\n".join(map(str, range(2_000))))) for known in drives],
    )
    connection.executemany(
        "INSERT OR REPLACE INTO heard VALUES (?, ?, ?)",
        [(known.number, signal, begin % 1_000) for known in drives for signal in HEARD],
    )


def _a_probe(at: int, noise: random.Random) -> ProbeDay:
    """As many reads as a probe makes, at times as a disk takes them."""

    def times(count: int) -> tuple[int, ...]:
        return tuple(round(noise.lognormvariate(9.0, 0.3)) for _ in range(count))

    return ProbeDay(at=at, place=0, band_us=times(READS), slice_us=times(REQUESTS), disk_ms=1_800)


def _fives(drives: tuple[KnownDrive, ...], begin: int, noise: random.Random) -> Iterator[tuple[int, ...]]:
    for at in range(begin, begin + WEEK, 300):
        for known in drives:
            one = _span(known.number, at, 300, noise).counts
            slot = rows.slot(at, known.number, 300)
            yield (
                slot, 300_000, one.reads, one.writes, one.read_bytes, one.write_bytes,
                one.read_ms, one.write_ms, one.busy_ms, 9_000, 8_000, 30, 0,
            )  # fmt: skip  # one row, as its columns stand


_Answer = TypeVar("_Answer")


@dataclass(frozen=True, slots=True, kw_only=True)
class Took:
    """How long something took, seconds.

    Attributes:
        wall: by the clock.
        queued: how much of it this thread was ready to run and had no processor, by the kernel's own count
            (Documentation/scheduler/sched-stats.rst); 0 where the kernel keeps none.
    """

    wall: float
    queued: float

    @property
    def own(self) -> float:
        """Work and waiting for the disk: what is left when the machine has a processor to give."""
        return self.wall - self.queued


def timed(deed: Callable[[], _Answer]) -> tuple[_Answer, Took]:
    """Do something, and say how long it took."""
    queued, begun = _queued(), time.perf_counter()
    answer = deed()
    wall = time.perf_counter() - begun
    return answer, Took(wall=wall, queued=min(_queued() - queued, wall))


def _queued() -> float:
    try:
        return int(Path("/proc/thread-self/schedstat").read_text().split()[1]) / 1e9
    except OSError:
        return 0.0


def upkept(history: History, now: int) -> list[Took]:
    """All upkeep that is due, as the watch does it; gives how long each bite held the writer."""
    held = []
    while (found := history.uncondensed(now)) is not None:
        day, rollups = found
        by_drive = {
            number: class_days(one for one in rollups if one.drive == number)
            for number in {one.drive for one in rollups}
        }
        _, took = timed(partial(history.condense, day, by_drive))
        held.append(took)
        history.fold_log()
    more = True
    while more:
        more, took = timed(partial(history.thin, now))
        held.append(took)
        history.fold_log()
    return held
