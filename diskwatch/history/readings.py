"""What was read, put together again: passes with their readings, out of changes and what held between them."""

import sqlite3
from collections.abc import Iterator
from dataclasses import replace

from diskwatch.history import packing, rows
from diskwatch.history.round import NOT_THERE
from diskwatch.records import Outcome, Pass, Reading, SignalKind, Value

_EVER = -(2**63)
_CHANGES = (
    "SELECT at, series, value, reason FROM value WHERE series = :series AND at >= :since"
    " UNION SELECT at, series, value, reason FROM fresh WHERE at >= :since AND series = :series"
)
_HELD = (
    "SELECT max(at) FROM (SELECT max(at) AS at FROM value WHERE series = :series AND at <= :after"
    " UNION ALL SELECT max(at) FROM fresh WHERE series = :series AND at <= :after)"
)
_PASSES = (
    "SELECT at, outcome, exit_bits, took_ms, text FROM pass"
    " LEFT JOIN sentence ON sentence.number = pass.explanation WHERE drive = ? AND at > ? ORDER BY at, nth"
)


def passes_with_readings(connection: sqlite3.Connection, drive: int, after: int | None) -> Iterator[Pass]:
    """A drive's passes as they were judged, oldest first; exact as far back as nothing was thinned.

    Each pass comes without the drive's description of itself, of which only the latest is kept.

    Args:
        connection: to the history.
        drive: the drive's number.
        after: leave out passes up to this time, UTC seconds since 1970; None for none.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    first = _EVER if after is None else after
    about = {
        number: (signal, unit, SignalKind(kind), source)
        for number, signal, unit, kind, source in connection.execute(
            "SELECT number, signal, unit, kind, source FROM series WHERE drive = ? AND kind IS NOT NULL",
            (drive,),
        ).fetchall()
    }
    changes = _changes(connection, tuple(about), first)
    beside = connection.execute(
        "SELECT at, packed FROM beside WHERE drive = ? AND at >= coalesce("
        "(SELECT max(at) FROM beside WHERE drive = ? AND at <= ?), ?) ORDER BY at",
        (drive, drive, first, first),
    ).fetchall()
    # The newest value of a signal holds, whichever series it stands in: a new unit begins a new one.
    held: dict[str, Value] = {}
    reading = Reading()
    for row in connection.execute(_PASSES, (drive, first)).fetchall():
        pass_ = rows.past_pass(row)
        while changes and changes[-1][0] <= pass_.at:
            _, series, value, reason = changes.pop()
            signal, unit, kind, source = about[series]
            held[signal] = Value(
                signal=signal, value=rows.value(value), unit=unit, kind=kind, source=source, reason=reason
            )
        while beside and beside[0][0] <= pass_.at:
            reading = packing.beside(beside.pop(0)[1])
        if pass_.outcome is Outcome.READ:
            there = tuple(value for value in held.values() if value.reason != NOT_THERE)
            pass_ = replace(pass_, reading=replace(reading, values=there))
        yield pass_


def _changes(connection: sqlite3.Connection, series: tuple[int, ...], after: int) -> list[rows.Row]:
    """Changes of several series from what held at a time on, newest first."""
    found: list[rows.Row] = []
    for number in series:
        (since,) = connection.execute(_HELD, {"series": number, "after": after}).fetchone()
        found += connection.execute(
            _CHANGES, {"series": number, "since": after if since is None else since}
        ).fetchall()
    return sorted(found, key=lambda row: (row[0], row[1]), reverse=True)
