"""Traffic in the history: spans go into the minutes and the five minutes that they lie in.

A span belongs wholly to the minute, and to the five minutes, of its middle; how much time the counts cover is
kept beside them, so that rates stay right also where spans are longer than a minute.
"""

import math
import sqlite3
from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import Literal

from diskwatch.history import packing, rows
from diskwatch.records import ClassDay, Direction, IoCounts, IoRollup, IoSpan
from diskwatch.units import DAY

MINUTE = 60
FIVE = 300
"""Lengths of the two stretches that traffic is kept by, seconds."""

_MINUTES = (
    "INSERT INTO io_minute (slot, span_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms)"
    " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (slot) DO UPDATE SET"
    " span_ms = span_ms + excluded.span_ms, reads = reads + excluded.reads,"
    " writes = writes + excluded.writes, read_bytes = read_bytes + excluded.read_bytes,"
    " write_bytes = write_bytes + excluded.write_bytes, read_ms = read_ms + excluded.read_ms,"
    " write_ms = write_ms + excluded.write_ms, busy_ms = busy_ms + excluded.busy_ms"
)
_FIVES = (
    "INSERT INTO io_five (slot, covered_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms,"
    " longest_read_us, longest_write_us, spans, reset) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"
    " ON CONFLICT (slot) DO UPDATE SET"
    " covered_ms = covered_ms + excluded.covered_ms, reads = reads + excluded.reads,"
    " writes = writes + excluded.writes, read_bytes = read_bytes + excluded.read_bytes,"
    " write_bytes = write_bytes + excluded.write_bytes, read_ms = read_ms + excluded.read_ms,"
    " write_ms = write_ms + excluded.write_ms, busy_ms = busy_ms + excluded.busy_ms,"
    " longest_read_us ="
    " nullif(max(coalesce(longest_read_us, -1), coalesce(excluded.longest_read_us, -1)), -1),"
    " longest_write_us ="
    " nullif(max(coalesce(longest_write_us, -1), coalesce(excluded.longest_write_us, -1)), -1),"
    " spans = spans + excluded.spans, reset = max(reset, excluded.reset)"
)
_ROLLUPS = (
    "SELECT drive, at, covered_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms,"
    " longest_read_us, longest_write_us, spans, reset FROM io_five WHERE slot >= ? AND slot < ?"
)


def write_spans(connection: sqlite3.Connection, spans: Sequence[IoSpan]) -> None:
    """Add spans of traffic to the stretches that they lie in.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    _reopen(connection, {math.floor(span.at - span.seconds / 2) // DAY for span in spans})
    connection.executemany(_MINUTES, _summed(spans, MINUTE, _minute))
    connection.executemany(_FIVES, _summed(spans, FIVE, _five))


def _summed(
    spans: Iterable[IoSpan], seconds: int, row: Callable[[Sequence[IoSpan]], Sequence[int | None]]
) -> list[tuple[int | None, ...]]:
    members: dict[int, list[IoSpan]] = {}
    for span in spans:
        slot = rows.slot(math.floor(span.at - span.seconds / 2), span.drive, seconds)
        members.setdefault(slot, []).append(span)
    return [(slot, *row(inside)) for slot, inside in sorted(members.items())]


def _minute(spans: Sequence[IoSpan]) -> tuple[int, ...]:
    counts = [span.counts for span in spans]
    return (
        sum(round(span.seconds * 1000) for span in spans),
        sum(one.reads for one in counts),
        sum(one.writes for one in counts),
        sum(one.read_bytes for one in counts),
        sum(one.write_bytes for one in counts),
        sum(one.read_ms for one in counts),
        sum(one.write_ms for one in counts),
        sum(one.busy_ms for one in counts),
    )


def _five(spans: Sequence[IoSpan]) -> tuple[int | None, ...]:
    counts = [span.counts for span in spans]
    return (
        *_minute(spans),
        max((one.read_ms * 1000 // one.reads for one in counts if one.reads), default=None),
        max((one.write_ms * 1000 // one.writes for one in counts if one.writes), default=None),
        len(spans),
        int(any(span.reset for span in spans)),
    )


def rollups(connection: sqlite3.Connection, since: int, until: int, drive: int | None) -> tuple[IoRollup, ...]:
    """Five-minute roll-ups that begin in ``since <= t < until``, oldest first; of one drive, or of all."""
    where = " ORDER BY slot" if drive is None else " AND drive = ? ORDER BY slot"
    bounds = (rows.slot(since + FIVE - 1, 0, FIVE), rows.slot(until + FIVE - 1, 0, FIVE))
    found = connection.execute(_ROLLUPS + where, bounds if drive is None else (*bounds, drive)).fetchall()
    return tuple(_rollup(row) for row in found)


def _rollup(row: rows.Row) -> IoRollup:
    drive, at, covered, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms, *rest = row
    longest_read, longest_write, spans, reset = rest
    return IoRollup(
        drive=drive,
        at=at + FIVE,
        wall_seconds=FIVE,
        covered_ms=covered,
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=read_bytes,
            write_bytes=write_bytes,
            read_ms=read_ms,
            write_ms=write_ms,
            busy_ms=busy_ms,
        ),
        longest_read_us=longest_read,
        longest_write_us=longest_write,
        spans=spans,
        reset=bool(reset),
    )


def _reopen(connection: sqlite3.Connection, days: Iterable[int]) -> None:
    """Let days be condensed anew into which a clock that was set back brings more, while they are whole."""
    oldest = connection.execute("SELECT at FROM io_five ORDER BY slot LIMIT 1").fetchone()
    if oldest is not None:
        connection.executemany(
            "DELETE FROM thinned WHERE what = 'condensed' AND number = ? AND number > ?",
            [(day, oldest[0] // DAY) for day in days],
        )


def stored_days(connection: sqlite3.Connection, table: Literal["io_minute", "io_five"]) -> Iterator[int]:
    """UTC day numbers of which a table has rows, newest first; found by steps in the index, one a day."""
    seconds = MINUTE if table == "io_minute" else FIVE
    newest = f"SELECT at FROM {table} WHERE slot < ? ORDER BY slot DESC LIMIT 1"  # noqa: S608  # one of two names
    before = 2**63 - 1
    while (found := connection.execute(newest, (before,)).fetchone()) is not None:
        day = found[0] // DAY
        yield day
        before = rows.slot(day * DAY, 0, seconds)


def uncondensed_day(connection: sqlite3.Connection, now: int) -> int | None:
    """The first day with roll-ups that is over and not condensed yet, as a UTC day number; None for none.

    A day is over an hour after its midnight, when its last traffic has long been committed; what comes later
    opens it again.
    """
    done = {
        day for (day,) in connection.execute("SELECT number FROM thinned WHERE what = 'condensed'").fetchall()
    }
    over = [day for day in stored_days(connection, "io_five") if (day + 1) * DAY + 3_600 <= now]
    return min((day for day in over if day not in done), default=None)


def write_class_days(
    connection: sqlite3.Connection, day: int, condensed: Iterable[tuple[int, Sequence[ClassDay]]]
) -> None:
    """Keep a day's histograms, which are condensed from all of its roll-ups, and note that the day is done.

    Args:
        connection: within a transaction.
        day: UTC day number.
        condensed: drives by their number, each with its classes.
    """
    connection.execute("DELETE FROM io_day WHERE drive IN (SELECT number FROM drive) AND day = ?", (day,))
    connection.executemany(
        "INSERT INTO io_day (drive, day, load_class, direction, rollups, operations, histogram)"
        " VALUES (?, ?, ?, ?, ?, ?, ?)",
        [
            (
                drive,
                day,
                one.load_class,
                int(one.direction),
                one.rollups,
                one.operations,
                packing.histogram_packed(one.histogram),
            )
            for drive, classes in condensed
            for one in classes
        ],
    )
    connection.execute(
        "INSERT OR REPLACE INTO thinned (what, number, before) VALUES ('condensed', ?, ?)",
        (day, (day + 1) * DAY),
    )


def class_days(
    connection: sqlite3.Connection, drive: int, since: int, until: int
) -> tuple[tuple[int, ClassDay], ...]:
    """A drive's histograms as ``(day, class)`` of days in ``since <= day < until``, oldest first."""
    found = connection.execute(
        "SELECT day, load_class, direction, rollups, operations, histogram FROM io_day"
        " WHERE drive = ? AND day >= ? AND day < ? ORDER BY day, load_class, direction",
        (drive, since, until),
    ).fetchall()
    return tuple(
        (
            day,
            ClassDay(
                load_class=load_class,
                direction=Direction(direction),
                rollups=count,
                operations=operations,
                histogram=packing.histogram(kept),
            ),
        )
        for day, load_class, direction, count, operations, kept in found
    )
