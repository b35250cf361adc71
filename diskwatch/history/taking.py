"""Rows of a drive's past that stand by themselves, taken in one by one: what is known here already stays.

Every taker raises ValueError, KeyError or TypeError for a row that cannot be right, and sqlite3.Error where it
could not be written.
"""

import json
import sqlite3
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from diskwatch.history import packing, rows
from diskwatch.history.fields import count, data, measure, text, whole, words
from diskwatch.history.probes import times, times_packed
from diskwatch.records import Direction, Entry, LimitSource, ProbeDay
from diskwatch.units import day_number


class Into:
    """Where rows of one drive are taken in."""

    def __init__(self, connection: sqlite3.Connection, drive: int) -> None:
        """Begin.

        Args:
            connection: within a transaction.
            drive: the drive's number here.
        """
        self.connection = connection
        self.drive = drive

    def insert(
        self, table: str, columns: Sequence[str], cells: Sequence[rows.Cell], *, drive: bool = True
    ) -> int:
        """Put a row into a table where there is none of its key; how many that made.

        Args:
            table: the table.
            columns: its columns, without the one that names the drive.
            cells: what they hold.
            drive: whether the table has that column.
        """
        names = ("drive", *columns) if drive else tuple(columns)
        marks = ", ".join("?" * len(names))
        # The names are those of our own schema; nothing of the file stands in them.
        sql = f"INSERT OR IGNORE INTO {table} ({', '.join(names)}) VALUES ({marks})"  # noqa: S608
        return self.connection.execute(sql, (self.drive, *cells) if drive else tuple(cells)).rowcount


def _owner(into: Into, at: int, of: Mapping[str, Any]) -> None:
    into.connection.execute(
        "INSERT INTO owner_fact (drive, fact, value, at) VALUES (?, ?, ?, ?) ON CONFLICT (drive, fact)"
        " DO UPDATE SET value = excluded.value, at = excluded.at WHERE excluded.at > at",
        (into.drive, text(of["fact"]), text(of["value"]), at),
    )


def _place(into: Into, at: int, of: Mapping[str, Any]) -> None:
    into.insert("plugged", ("since", "device", "bay"), (at, text(of["device"]), words(of["bay"])))


def _reading(into: Into, at: int, of: Mapping[str, Any]) -> None:
    packed = packing.packed(json.dumps(of["reading"], separators=(",", ":")))
    packing.reading(packed)  # refuses what is no reading
    into.connection.execute(
        "INSERT INTO last_reading (drive, at, packed) VALUES (?, ?, ?) ON CONFLICT (drive)"
        " DO UPDATE SET at = excluded.at, packed = excluded.packed WHERE excluded.at > at",
        (into.drive, at, packed),
    )


def _heard(into: Into, at: int, of: Mapping[str, Any]) -> None:
    del at
    # What was counted there is counted on here: a count that fell would look like another drive's.
    into.connection.execute(
        "INSERT INTO heard (drive, signal, total) VALUES (?, ?, ?) ON CONFLICT (drive, signal)"
        " DO UPDATE SET total = max(total, excluded.total)",
        (into.drive, text(of["signal"]), whole(of["total"])),
    )


def _answer(into: Into, at: int, of: Mapping[str, Any]) -> None:
    into.connection.execute(
        "INSERT INTO answer (drive, at, call, packed) VALUES (?, ?, ?, ?) ON CONFLICT (drive)"
        " DO UPDATE SET at = excluded.at, call = excluded.call, packed = excluded.packed"
        " WHERE excluded.at > at",
        (into.drive, at, words(of["call"]), packing.packed(text(of["text"]))),
    )


def _latency(into: Into, at: int, of: Mapping[str, Any]) -> None:
    learnt = data(json.loads(text(of["state"])))
    # What is usual on another machine need not be so here: its port's name there is no port's name here.
    learnt["key"] = f"elsewhere {learnt.get('key', '')}"
    packed = packing.packed(json.dumps(learnt, separators=(",", ":")))
    into.insert("latency_state", ("through", "packed"), (day_number(at), packed))


def _forecast(into: Into, at: int, of: Mapping[str, Any]) -> None:
    limit, probability = measure(of["at_limit"]), measure(of["probability"])
    if limit is None or probability is None:
        raise ValueError("a forecast lacks its limit or its probability")
    columns = ("at_limit", "limit_from", "low", "high", "probability", "reason", "reached")
    cells = (
        limit,
        LimitSource(of["limit_from"]).value,
        measure(of["low"]),
        measure(of["high"]),
        probability,
        words(of["reason"]),
        count(of["reached"]),
    )
    into.insert("forecast", ("signal", "made_on_day", *columns), (text(of["signal"]), day_number(at), *cells))


def _probe(into: Into, at: int, of: Mapping[str, Any]) -> None:
    band, sliced = times(of["times"])
    day = ProbeDay(
        at=at,
        place=whole(of["place"]),
        band_us=band,
        slice_us=sliced,
        disk_ms=whole(of["disk_ms"]),
    )
    columns = ("at", "place", "disk_ms", "packed")
    into.insert("probe", columns, (at, day.place, day.disk_ms, times_packed(day)))


def _load(into: Into, at: int, of: Mapping[str, Any]) -> None:
    histogram = {whole(bin_): whole(count) for bin_, count in of["histogram"]}
    into.insert(
        "io_day",
        ("day", "load_class", "direction", "rollups", "operations", "histogram"),
        (
            day_number(at),
            whole(of["load_class"]),
            int(Direction(of["direction"])),
            whole(of["rollups"]),
            whole(of["operations"]),
            packing.histogram_packed(histogram),
        ),
    )


def _finding(into: Into, at: int, of: Mapping[str, Any]) -> None:
    signals = [text(one) for one in of["signals"]]
    row = (
        text(of["name"]), of["kind"], json.dumps(signals), at, of["calls"], of["cause"],
        measure(of["evidence"]), text(of["sentence"]), json.dumps(data(of["data"])),
    )  # fmt: skip  # one row, as its columns stand
    cells = rows.finding_row(rows.finding(row))
    closed = count(of["closed"])
    there = into.connection.execute(
        "SELECT 1 FROM finding WHERE drive = ? AND name = ? AND (since = ? OR (closed IS NULL AND ? IS NULL))",
        (into.drive, cells[0], at, closed),
    ).fetchone()
    if there is None:
        columns = (
            "name",
            "kind",
            "signals",
            "since",
            "calls",
            "cause",
            "evidence",
            "sentence",
            "data",
            "closed",
        )
        into.insert("finding", columns, (*cells, closed))


def _event(into: Into, at: int, of: Mapping[str, Any]) -> None:
    entry = Entry(at=at, drive=into.drive, kind=text(of["kind"]), text=text(of["text"]), data=data(of["data"]))
    cells = rows.entry_row(entry)
    there = into.connection.execute(
        "SELECT 1 FROM day_book WHERE drive = ? AND at = ? AND kind = ? AND text = ?",
        (into.drive, at, entry.kind, cells[3]),
    ).fetchone()
    if there is None:
        into.insert("day_book", ("at", "drive", "kind", "text", "data"), cells, drive=False)


TAKES: Mapping[str, Callable[[Into, int, Mapping[str, Any]], None]] = {
    "owner": _owner,
    "place": _place,
    "reading": _reading,
    "heard": _heard,
    "answer": _answer,
    "latency": _latency,
    "probe": _probe,
    "forecast": _forecast,
    "load": _load,
    "finding": _finding,
    "event": _event,
}
"""How each record is taken in, by its name in the file."""
