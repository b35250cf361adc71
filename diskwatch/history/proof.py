"""What a ticket asks of a history besides what a screen asks: first values, every change, dated copies, places.

Every function raises sqlite3.Error where the history cannot be read and ValueError where it holds what cannot
be right.
"""

import sqlite3
from collections.abc import Collection
from dataclasses import dataclass

from diskwatch.history import packing, rows
from diskwatch.history.counting import counted_before
from diskwatch.history.keeping import daily
from diskwatch.records import Outcome, Pass, Reading, SignalKind, Value

BASELINE_DAYS = 30
"""Days of a value that moves all the time that are read as its beginning."""

_FIRST = (
    "SELECT at, value FROM value WHERE series = ?1 UNION ALL SELECT at, value FROM fresh WHERE series = ?1"
    " ORDER BY at LIMIT 1"
)
_HELD = (
    "SELECT max(at) FROM (SELECT max(at) AS at FROM value WHERE series = :series AND at <= :at"
    " UNION ALL SELECT max(at) FROM fresh WHERE series = :series AND at <= :at)"
)
_CHANGES_SINCE = (
    "SELECT turn, at, nth, series, value FROM value WHERE series = :series AND at >= :from"
    " UNION SELECT turn, at, nth, series, value FROM fresh WHERE series = :series AND at >= :from"
)
_CHANGES = (
    "SELECT at, value FROM value WHERE series = :series AND at <= :until"
    " UNION ALL SELECT at, value FROM fresh WHERE series = :series AND at <= :until ORDER BY at"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class SignalPast:
    """One signal from its first value on.

    Attributes:
        name: the signal.
        unit: its unit.
        kind: how it behaves.
        source: where on the drive it stands.
        first: time and value of its first reading, UTC seconds since 1970.
        changes: every change as ``(at, value)``, oldest first, the first reading included; of one that moves
            all the time only those of its first `BASELINE_DAYS`.
        complete: whether these are all.
    """

    name: str
    unit: str
    kind: SignalKind
    source: str
    first: tuple[int, int | str | None]
    changes: tuple[tuple[int, int | str | None], ...]
    complete: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Plugged:
    """Where a drive was plugged in.

    Attributes:
        since: from when on, UTC seconds since 1970.
        device: how it was addressed.
        bay: the port, or None where the kernel did not say.
    """

    since: int
    device: str
    bay: str | None


@dataclass(frozen=True, slots=True, kw_only=True, order=True)
class Copy:
    """A dated exact copy of what was learnt of a drive.

    Attributes:
        turn: how often the clock had been set back under the drive.
        at: time of the last pass that it knows, UTC seconds since 1970.
    """

    turn: int
    at: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Printed:
    """What a drive last printed, word for word.

    Attributes:
        at: when, UTC seconds since 1970.
        text: all of it.
    """

    at: int
    text: str


def signal_pasts(connection: sqlite3.Connection, drive: int) -> tuple[SignalPast, ...]:
    """Every signal that a drive has or had, by name."""
    found = []
    for number, name, unit, kind, source in connection.execute(
        "SELECT number, signal, unit, kind, source FROM series"
        " WHERE drive = ? AND current AND kind IS NOT NULL ORDER BY signal",
        (drive,),
    ).fetchall():
        first = connection.execute(_FIRST, (number,)).fetchone()
        if first is None:
            continue
        complete = daily(name, kind, unit) is None
        until = 2**62 if complete else first[0] + BASELINE_DAYS * 86_400
        changes = connection.execute(_CHANGES, {"series": number, "until": until}).fetchall()
        found.append(
            SignalPast(
                name=name,
                unit=unit or "",
                kind=SignalKind(kind),
                source=source or "",
                first=(first[0], rows.value(first[1])),
                changes=tuple((at, rows.value(kept)) for at, kept in changes),
                complete=complete,
            )
        )
    return tuple(found)


def places(connection: sqlite3.Connection, drive: int) -> tuple[Plugged, ...]:
    """Where a drive has been plugged in, oldest first."""
    found = connection.execute(
        "SELECT since, device, bay FROM plugged WHERE drive = ? ORDER BY since", (drive,)
    ).fetchall()
    return tuple(Plugged(since=since, device=device, bay=bay) for since, device, bay in found)


def copies(connection: sqlite3.Connection, drive: int) -> tuple[Copy, ...]:
    """The dated exact copies of a drive's state, in the order in which they were made."""
    found = connection.execute(
        "SELECT turn, at FROM kept_state WHERE drive = ? ORDER BY turn, at", (drive,)
    ).fetchall()
    return tuple(Copy(turn=turn, at=at) for turn, at in found)


def state_of(connection: sqlite3.Connection, drive: int, of: Copy) -> str | None:
    """The state that a copy holds; None where there is no such copy."""
    found = connection.execute(
        "SELECT packed FROM kept_state WHERE drive = ? AND turn = ? AND at = ?", (drive, of.turn, of.at)
    ).fetchone()
    return None if found is None else packing.unpacked(found[0])


def followed(
    connection: sqlite3.Connection, drive: int, signals: Collection[str], after: Copy | None
) -> tuple[Pass, ...]:
    """Passes that read a drive, with these signals alone, in the order in which they were made.

    In the place of passes that were thinned stand those that moved a signal, and the first and the last of each
    day: a ledger asks for no more, where the hours are known well enough.

    Args:
        connection: to the history.
        drive: the drive's number.
        signals: what is wanted of each reading.
        after: leave out all up to this copy; None for none.
    """
    since = (0, -(2**62)) if after is None else (after.turn, after.at)
    about, changes = _changes_of(connection, drive, signals, since)
    moments = {
        (turn, at, nth)
        for turn, at, nth in connection.execute(
            "SELECT turn, at, nth FROM pass WHERE drive = ? AND (turn, at) > (?, ?) AND outcome = 'read'",
            (drive, *since),
        )
    }
    for first, last in _thinned_days(connection, drive, since[1]):
        moved = {change[1] for change in changes if first < change[1] < last}
        moments |= {(since[0], at, 0) for at in (first, last, *moved)}
    held: dict[str, Value] = {}
    passes = []
    reading = Reading()
    place = 0
    for turn, at, nth in sorted(moments):
        news = False
        while place < len(changes) and changes[place][:3] <= (turn, at, nth):
            *_, series, kept = changes[place]
            name, unit, kind, source = about[series]
            held[name] = Value(
                signal=name, value=rows.value(kept), unit=unit, kind=kind, source=source, reason=None
            )
            place, news = place + 1, True
        if news:
            reading = Reading(values=tuple(one for one in held.values() if one.value is not None))
        passes.append(Pass(at=at, outcome=Outcome.READ, reading=reading))
    return tuple(passes)


def _changes_of(
    connection: sqlite3.Connection, drive: int, signals: Collection[str], since: tuple[int, int]
) -> tuple[dict[int, tuple[str, str, SignalKind, str]], list[rows.Row]]:
    about = {
        number: (name, unit or "", SignalKind(kind), source or "")
        for number, name, unit, kind, source in connection.execute(
            "SELECT number, signal, unit, kind, source FROM series WHERE drive = ? AND kind IS NOT NULL",
            (drive,),
        )
        if name in signals
    }
    changes: list[rows.Row] = []
    for number in about:
        values = {"series": number, "at": since[1]}
        (held,) = connection.execute(_HELD, values).fetchone()
        # A clock that was set back puts later changes before an earlier time: then all are read.
        values["from"] = -(2**62) if held is None or since[0] else held
        changes += connection.execute(_CHANGES_SINCE, values).fetchall()
    return about, sorted(changes, key=lambda row: row[:4])


def _thinned_days(connection: sqlite3.Connection, drive: int, since: int) -> list[tuple[int, int]]:
    mark = counted_before(connection, drive)
    return connection.execute(
        "SELECT first, last FROM pass_day WHERE drive = ? AND outcome = 'read' AND first > ? AND last < ?",
        (drive, since, mark),
    ).fetchall()


def printed(connection: sqlite3.Connection, drive: int) -> Printed | None:
    """What a drive last printed; None where nothing of it was kept."""
    found = connection.execute("SELECT at, packed FROM answer WHERE drive = ?", (drive,)).fetchone()
    return None if found is None else Printed(at=found[0], text=packing.unpacked(found[1]))
