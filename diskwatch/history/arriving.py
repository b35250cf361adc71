"""A drive's past, taken in from rows that travelled; what is known here already stays as it is.

Whoever calls holds the transaction open: a past arrives wholly or not at all. Rows that cannot be right are
left out and named.
"""

import json
import sqlite3
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import partial
from typing import Any

from diskwatch.history import packing, rows
from diskwatch.history.counting import counted_before, set_counted
from diskwatch.history.exchange import Line
from diskwatch.history.fields import count, measure, text, whole, words
from diskwatch.history.mishaps import why_unfit
from diskwatch.history.moments import Dated, turn_at
from diskwatch.history.round import sentence_number
from diskwatch.history.settling import Made, settle_calls, settle_counts, settle_last_pass, settle_signals
from diskwatch.history.taking import TAKES, Into
from diskwatch.records import (
    Call,
    Drive,
    Identity,
    Kind,
    Outcome,
    Pass,
    Place,
    SignalKind,
)
from diskwatch.units import day_number, plain

_MOST = 1 << 31
"""More passes of one second, or clocks set back, than any drive lives to see."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Described:
    """A drive as a file describes it.

    Attributes:
        drive: who it is.
        place: where it was last plugged in, on the machine that wrote the file.
        first_seen: when it was first seen there, UTC seconds since 1970.
    """

    drive: Drive
    place: Place
    first_seen: int


def described(line: Line) -> Described:
    """A drive from its row.

    Raises:
        ValueError: the row cannot be right.
    """
    of = line.fields
    try:
        identity = Identity(
            wwn=words(of["wwn"]),
            model=words(of["model"]),
            serial=words(of["serial"]),
            path=text(of["path"]),
        )
        return Described(
            drive=Drive(
                identity=identity,
                kind=Kind(of["kind"]),
                firmware=words(of["firmware"]),
                capacity_bytes=count(of["capacity_bytes"]),
                rotation_rpm=count(of["rotation_rpm"]),
            ),
            place=Place(device=text(of["device"]), bay=words(of["bay"])),
            first_seen=line.at,
        )
    except KeyError as error:
        raise ValueError(f"it lacks {error}") from error


@dataclass(frozen=True, slots=True, kw_only=True)
class Arrived:
    """What came of taking in one drive's past.

    Attributes:
        wrong: what is wrong with rows that were left out.
        new_from: time of the first pass that was not known here; None where all were.
        own_from: time of the first pass that only this history had; None where there was none.
        states: the file's dated states of the analyser, oldest first.
    """

    wrong: tuple[str, ...]
    new_from: int | None
    own_from: int | None
    states: tuple[Dated, ...]


def take_in(connection: sqlite3.Connection, drive: int, lines: Iterable[Line]) -> Arrived:
    """Take in the rows of one drive.

    Args:
        connection: within a transaction.
        drive: the drive's number here.
        lines: its rows, but for the one that describes it.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    arrival = _Arrival(connection, drive)
    wrong = []
    for line in lines:
        take = arrival.takes.get(line.record)
        try:
            if take is None:
                raise ValueError(f"there is no such record: {line.record}")  # noqa: TRY301  # told as all others
            take(line.at, line.fields)
        except (ValueError, KeyError, TypeError, OverflowError, sqlite3.IntegrityError) as error:
            wrong.append(f"row {line.number} is left out: {plain(_why(error))}")
    arrival.settle()
    return Arrived(
        wrong=tuple(wrong),
        new_from=min((at for at, _ in arrival.arrived - arrival.before), default=None),
        own_from=min((at for at, _ in arrival.before - arrival.arrived), default=None),
        states=tuple(sorted(arrival.states)),
    )


def _why(error: Exception) -> str:
    if isinstance(error, KeyError):
        return f"it lacks {error}"
    return why_unfit(error) if isinstance(error, sqlite3.IntegrityError) else str(error)


class _Arrival:
    """Takes in rows of one drive; `settle` puts in order what depends on all of them."""

    def __init__(self, connection: sqlite3.Connection, drive: int) -> None:
        self._db = connection
        self._drive = drive
        self._calls: list[Call] = []
        self._counted: set[Made] = set()
        self._mark = self._own_mark = counted_before(connection, drive)
        self.before: set[Made] = set(
            connection.execute("SELECT at, nth FROM pass WHERE drive = ?", (drive,)).fetchall()
        )
        (self._own_turn,) = connection.execute("SELECT turn FROM drive WHERE number = ?", (drive,)).fetchone()
        self.arrived: set[Made] = set()
        self.states: list[Dated] = []
        self._into = Into(connection, drive)
        self.takes: dict[str, Callable[[int, Mapping[str, Any]], object]] = {
            **{name: partial(take, self._into) for name, take in TAKES.items()},
            "passes": self._passes,
            "pass": self._pass,
            "value": self._value,
            "beside": self._beside,
            "evidence": self._evidence,
            "call": self._call,
            "copy": self._copy,
            "state": self._state,
        }

    def _passes(self, at: int, of: Mapping[str, Any]) -> None:
        outcome, last = Outcome(of["outcome"]).value, whole(of["last"])
        # The same drive's passes of the same day were made by one machine: both tell of the same ones.
        self._db.execute(
            "INSERT INTO pass_day (drive, day, outcome, passes, first, last) VALUES (?, ?, ?, ?, ?, ?)"
            " ON CONFLICT (drive, day, outcome) DO UPDATE SET passes = max(passes, excluded.passes),"
            " first = min(first, excluded.first), last = max(last, excluded.last)",
            (self._drive, day_number(at), outcome, whole(of["passes"]), at, last),
        )
        self._mark = max(self._mark, last + 1)

    def _pass(self, at: int, of: Mapping[str, Any]) -> None:
        told = Pass(
            at=at,
            outcome=Outcome(of["outcome"]),
            exit_bits=count(of["exit_bits"]),
            took_ms=whole(of["took_ms"]),
            explanation=words(of["explanation"]),
        )
        explanation = sentence_number(self._db, told.explanation)
        nth = _small(of, "nth")
        columns = ("at", "nth", "turn", "outcome", "exit_bits", "took_ms", "explanation")
        cells = (
            at,
            nth,
            self._turn(at, of),
            told.outcome.value,
            told.exit_bits,
            told.took_ms,
            explanation,
        )
        self._into.insert("pass", columns, cells)
        self.arrived.add((at, nth))
        if of.get("counted"):
            self._counted.add((at, nth))

    def _turn(self, at: int, of: Mapping[str, Any]) -> int:
        """Its turn, as the file tells it; where there are own passes, the one that these had then."""
        told = _small(of, "turn")
        if not self.before:
            return told
        return turn_at(self._db, self._drive, at) if self._own_turn else 0

    def _series(self, signal: str, about: tuple[str, str, str] | None) -> int:
        if about is None:
            where, cells = "signal = ? ORDER BY current DESC", (signal,)
        else:
            # A series that only a ledger has so far takes the values up.
            where, cells = "signal = ? AND (unit IS NULL OR unit = ?)", (signal, about[0])  # type: ignore[assignment]  # two columns or one
        found = self._db.execute(
            f"SELECT number, kind FROM series WHERE drive = ? AND {where}",  # noqa: S608  # one of two texts
            (self._drive, *cells),
        ).fetchone()
        if found is not None:
            if found[1] is None and about is not None:
                self._db.execute(
                    "UPDATE series SET unit = ?, kind = ?, source = ? WHERE number = ?", (*about, found[0])
                )
            return int(found[0])
        unit, kind, source = about or (None, None, None)
        current = (
            self._db.execute(
                "SELECT 1 FROM series WHERE drive = ? AND signal = ? AND current", (self._drive, signal)
            ).fetchone()
            is None
        )
        made = self._db.execute(
            "INSERT INTO series (drive, signal, unit, kind, source, current) VALUES (?, ?, ?, ?, ?, ?)"
            " RETURNING number",
            (self._drive, signal, unit, kind, source, int(current)),
        ).fetchone()
        return int(made[0])

    def _value(self, at: int, of: Mapping[str, Any]) -> None:
        found = of["value"]
        if not isinstance(found, str):
            found = count(found)
        about = (text(of["unit"]), SignalKind(of["kind"]).value, text(of["source"]))
        series = self._series(text(of["signal"]), about)
        nth = _small(of, "nth")
        there = self._db.execute(
            "SELECT 1 FROM fresh WHERE at = ? AND series = ? AND nth = ?", (at, series, nth)
        ).fetchone()
        if there is None:
            columns = ("series", "at", "nth", "turn", "value", "reason")
            cells = (series, at, nth, self._turn(at, of), rows.cell(found), words(of["reason"]))
            self._into.insert("value", columns, cells, drive=False)

    def _beside(self, at: int, of: Mapping[str, Any]) -> None:
        packed = json.dumps(of["reading"], separators=(",", ":")).encode()
        packing.beside(packed)  # refuses what is no reading
        self._into.insert(
            "beside", ("at", "nth", "turn", "packed"), (at, _small(of, "nth"), self._turn(at, of), packed)
        )

    def _evidence(self, at: int, of: Mapping[str, Any]) -> None:
        series = self._series(text(of["signal"]), None)
        self._into.insert(
            "evidence",
            ("series", "day", "evidence"),
            (series, day_number(at), float(of["evidence"])),
            drive=False,
        )

    def _call(self, at: int, of: Mapping[str, Any]) -> None:
        row = (
            at, of["word"], of["cause"], measure(of["cause_probability"]), of["cause_second"],
            text(of["reason"]), text(of["rule"]), measure(of["evidence"]),
        )  # fmt: skip  # one row, as its columns stand
        self._calls.append(rows.call(row))

    def _copy(self, at: int, of: Mapping[str, Any]) -> None:
        packed = packing.packed(text(of["state"]))
        self._into.insert("kept_state", ("at", "turn", "packed"), (at, self._turn(at, of), packed))
        self._state(at, of)

    def _state(self, at: int, of: Mapping[str, Any]) -> None:
        # Whether it may stand as it is, only he who knows the analyser can tell.
        self.states.append(Dated(turn=self._turn(at, of), at=at, state=text(of["state"])))

    def settle(self) -> None:
        """Put in order what depends on all rows."""
        if self._mark != self._own_mark:
            uncounted = (self.before | self.arrived) - self._counted
            settle_counts(
                self._db,
                self._drive,
                [one for one in uncounted if one[0] < self._mark and not self._counted_here(one)],
            )
            set_counted(self._db, self._drive, self._mark)
        settle_calls(self._db, self._drive, self._calls)
        settle_signals(self._db, self._drive)
        settle_last_pass(self._db, self._drive)

    def _counted_here(self, one: Made) -> bool:
        return one in self.before and one[0] < self._own_mark


def _small(of: Mapping[str, Any], name: str) -> int:
    # Not told where it was written before passes were told apart so.
    found = whole(of.get(name, 0))
    # Own passes are counted on from here: there must be room.
    if not 0 <= found < _MOST:
        raise ValueError(f"{name} cannot be right: {found}")
    return found
