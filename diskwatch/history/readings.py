"""What was read, put together again: passes with their readings, out of changes and what held between them."""

import sqlite3
from collections import deque
from collections.abc import Iterator
from dataclasses import replace

from diskwatch.history import packing, rows
from diskwatch.history.moments import Dated
from diskwatch.history.stating import NOT_THERE
from diskwatch.records import SENSES, Outcome, Pass, Reading, SignalKind, Value

_EVER = -(2**63)
_CHANGES = (
    "SELECT turn, at, nth, series, value, reason FROM value WHERE series = ?1"
    " UNION SELECT turn, at, nth, series, value, reason FROM fresh WHERE series = ?1"
)
_PASSES = (
    "SELECT turn, nth, at, outcome, exit_bits, took_ms, text FROM pass"
    " LEFT JOIN sentence ON sentence.number = pass.explanation"
    " WHERE drive = ? AND (turn, at) > (?, ?) ORDER BY turn, at, nth"
)
_BESIDE = "SELECT turn, at, nth, packed FROM beside WHERE drive = ? ORDER BY turn, at, nth"


def passes_with_readings(
    connection: sqlite3.Connection, drive: int, after: Dated | None
) -> Iterator[tuple[int, Pass]]:
    """A drive's passes as they were judged, each with its turn; exact as far back as nothing was thinned.

    Each pass comes without the drive's description of itself, of which only the latest is kept.

    Args:
        connection: to the history.
        drive: the drive's number.
        after: leave out the passes that led to this state; None for none.

    Raises:
        sqlite3.Error: the history cannot be read.
        ValueError: it holds what cannot be right.
    """
    about = {
        number: (signal, unit, SignalKind(kind), source)
        for number, signal, unit, kind, source in connection.execute(
            "SELECT number, signal, unit, kind, source FROM series WHERE drive = ? AND kind IS NOT NULL",
            (drive,),
        ).fetchall()
    }
    changes = _changes(connection, tuple(about))
    beside = deque(connection.execute(_BESIDE, (drive,)))
    # The newest value of a signal holds, whichever series it stands in: a new unit begins a new one.
    held: dict[str, Value] = {}
    reading = Reading()
    since = (0, _EVER) if after is None else (after.turn, after.at)
    for turn, nth, *row in connection.execute(_PASSES, (drive, *since)).fetchall():
        pass_ = rows.past_pass(tuple(row))
        moment = (turn, pass_.at, nth)
        while changes and changes[0][:3] <= moment:
            *_, series, value, reason = changes.popleft()
            signal, unit, kind, source = about[series]
            held[signal] = Value(
                signal=signal, value=rows.value(value), unit=unit, kind=kind, source=source, reason=reason
            )
        while beside and beside[0][:3] <= moment:
            reading = packing.beside(beside.popleft()[3])
        there = [value for value in held.values() if value.reason != NOT_THERE]
        heard = tuple(value for value in there if value.source in SENSES)
        if heard:
            pass_ = replace(pass_, heard=heard)
        if pass_.outcome is Outcome.READ:
            read = tuple(value for value in there if value.source not in SENSES)
            pass_ = replace(pass_, reading=replace(reading, values=read))
        yield turn, pass_


def _changes(connection: sqlite3.Connection, series: tuple[int, ...]) -> deque[rows.Row]:
    """All changes of several series, in the order in which they were read."""
    found = [row for number in series for row in connection.execute(_CHANGES, (number,))]
    return deque(sorted(found, key=lambda row: row[:4]))
