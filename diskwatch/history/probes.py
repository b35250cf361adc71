"""Probes of disks, each kept whole: some 800 bytes a drive and day where the owner wants them."""

import json
import sqlite3
from typing import Any

from diskwatch.history import packing
from diskwatch.history.fields import count
from diskwatch.records import ProbeDay


def write_probe(connection: sqlite3.Connection, drive: int, day: ProbeDay) -> None:
    """Keep one probe.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    connection.execute(
        "INSERT OR REPLACE INTO probe (drive, at, place, disk_ms, packed) VALUES (?, ?, ?, ?, ?)",
        (drive, day.at, day.place, day.disk_ms, times_packed(day)),
    )


def probes(connection: sqlite3.Connection, drive: int, *, after: int | None = None) -> tuple[ProbeDay, ...]:
    """A drive's probes, oldest first.

    Args:
        connection: to the history.
        drive: the drive's number.
        after: leave out those that ended by this time, UTC seconds since 1970; None for none.

    Raises:
        ValueError: the history holds what cannot be right.
    """
    found = connection.execute(
        "SELECT at, place, disk_ms, packed FROM probe WHERE drive = ? AND at > ? ORDER BY at",
        (drive, -(2**62) if after is None else after),
    )
    return tuple(_day(*row) for row in found)


def times_packed(day: ProbeDay) -> bytes:
    """The times of a probe made small."""
    return packing.packed(json.dumps([day.band_us, day.slice_us], separators=(",", ":")))


def times(told: Any) -> tuple[tuple[int | None, ...], tuple[int | None, ...]]:
    """The times of a probe's band and slice from a JSON value.

    Raises:
        ValueError: these are no times.
    """
    if not isinstance(told, list) or len(told) != 2 or not all(isinstance(part, list) for part in told):
        raise ValueError("a probe lacks the times of its reads")
    band, sliced = (tuple(count(one) for one in part) for part in told)
    if any(one is not None and one < 0 for one in (*band, *sliced)):
        raise ValueError("a read of a probe took less than no time")
    return band, sliced


def _day(at: int, place: int, disk_ms: int, packed: bytes) -> ProbeDay:
    band, sliced = times(json.loads(packing.unpacked(packed)))
    return ProbeDay(at=at, place=place, band_us=band, slice_us=sliced, disk_ms=disk_ms)
