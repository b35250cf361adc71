"""A drive's past, taken in from rows that travelled; what is known here already stays as it is.

Whoever calls holds the transaction open: a past arrives wholly or not at all. Rows that cannot be right are
left out and named.
"""

import json
import sqlite3
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from diskwatch.history import packing, rows
from diskwatch.history.exchange import Line
from diskwatch.history.round import sentence_number
from diskwatch.records import (
    Call,
    Direction,
    Drive,
    Entry,
    Identity,
    Kind,
    Outcome,
    Pass,
    Place,
    SignalKind,
)
from diskwatch.units import day_number, plain


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
            wwn=_words(of["wwn"]),
            model=_words(of["model"]),
            serial=_words(of["serial"]),
            path=_text(of["path"]),
        )
        return Described(
            drive=Drive(
                identity=identity,
                kind=Kind(of["kind"]),
                firmware=_words(of["firmware"]),
                capacity_bytes=_count(of["capacity_bytes"]),
                rotation_rpm=_count(of["rotation_rpm"]),
            ),
            place=Place(device=_text(of["device"]), bay=_words(of["bay"])),
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
        states: the file's dated states of the analyser as ``(time of the last pass, state)``, oldest first.
    """

    wrong: tuple[str, ...]
    new_from: int | None
    own_from: int | None
    states: tuple[tuple[int, str], ...]


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
            missing = f"it lacks {error}" if isinstance(error, KeyError) else str(error)
            wrong.append(f"row {line.number} is left out: {plain(missing)}")
    arrival.settle()
    return Arrived(
        wrong=tuple(wrong),
        new_from=min(arrival.arrived - arrival.before, default=None),
        own_from=min(arrival.before - arrival.arrived, default=None),
        states=tuple(sorted(arrival.states)),
    )


def _words(thing: Any) -> str | None:
    return None if thing is None else _text(thing)


def _text(thing: Any) -> str:
    if not isinstance(thing, str):
        raise ValueError(f"no text: {thing!r}")  # noqa: TRY004  # the file is wrong, not our caller
    return rows.text(thing)


def _count(thing: Any) -> int | None:
    if thing is not None and (isinstance(thing, bool) or not isinstance(thing, int)):
        raise ValueError(f"no whole number: {thing!r}")  # likewise
    return thing


def _whole(thing: Any) -> int:
    found = _count(thing)
    if found is None:
        raise ValueError("a number is missing")
    return found


def _data(thing: Any) -> dict[str, object]:
    if not isinstance(thing, dict):
        raise ValueError("its data are no object")  # noqa: TRY004  # likewise
    return thing


def _measure(thing: Any) -> float | None:
    if thing is None or (isinstance(thing, int | float) and not isinstance(thing, bool)):
        return None if thing is None else float(thing)
    raise ValueError(f"no number: {thing!r}")


class _Arrival:
    """Takes in rows of one drive; `settle` puts in order what depends on all of them."""

    def __init__(self, connection: sqlite3.Connection, drive: int) -> None:
        self._db = connection
        self._drive = drive
        self._calls: list[Call] = []
        self._counted: set[int] = set()
        self._mark = self._own_mark = self._thinned()
        self.before = {
            at for (at,) in connection.execute("SELECT at FROM pass WHERE drive = ?", (drive,)).fetchall()
        }
        self.arrived: set[int] = set()
        self.states: list[tuple[int, str]] = []
        self.takes: dict[str, Callable[[int, Mapping[str, Any]], object]] = {
            "owner": self._owner,
            "place": self._place,
            "passes": self._passes,
            "pass": self._pass,
            "value": self._value,
            "beside": self._beside,
            "evidence": self._evidence,
            "load": self._load,
            "finding": self._finding,
            "call": self._call,
            "event": self._event,
            "copy": self._copy,
            "state": self._state,
        }

    def _thinned(self) -> int:
        found = self._db.execute(
            "SELECT before FROM thinned WHERE what = 'pass' AND number = ?", (self._drive,)
        ).fetchone()
        return -(2**63) if found is None else int(found[0])

    def _insert(
        self, table: str, columns: Sequence[str], cells: Sequence[rows.Cell], *, drive: bool = True
    ) -> int:
        names = ("drive", *columns) if drive else tuple(columns)
        marks = ", ".join("?" * len(names))
        # The names are those of our own schema; nothing of the file stands in them.
        sql = f"INSERT OR IGNORE INTO {table} ({', '.join(names)}) VALUES ({marks})"  # noqa: S608
        return self._db.execute(sql, (self._drive, *cells) if drive else tuple(cells)).rowcount

    def _owner(self, at: int, of: Mapping[str, Any]) -> None:
        self._db.execute(
            "INSERT INTO owner_fact (drive, fact, value, at) VALUES (?, ?, ?, ?) ON CONFLICT (drive, fact)"
            " DO UPDATE SET value = excluded.value, at = excluded.at WHERE excluded.at > at",
            (self._drive, _text(of["fact"]), _text(of["value"]), at),
        )

    def _place(self, at: int, of: Mapping[str, Any]) -> None:
        self._insert("plugged", ("since", "device", "bay"), (at, _text(of["device"]), _words(of["bay"])))

    def _passes(self, at: int, of: Mapping[str, Any]) -> None:
        outcome, last = Outcome(of["outcome"]).value, _whole(of["last"])
        # The same drive's passes of the same day were made by one machine: both tell of the same ones.
        self._db.execute(
            "INSERT INTO pass_day (drive, day, outcome, passes, first, last) VALUES (?, ?, ?, ?, ?, ?)"
            " ON CONFLICT (drive, day, outcome) DO UPDATE SET passes = max(passes, excluded.passes),"
            " first = min(first, excluded.first), last = max(last, excluded.last)",
            (self._drive, day_number(at), outcome, _whole(of["passes"]), at, last),
        )
        self._mark = max(self._mark, last + 1)

    def _pass(self, at: int, of: Mapping[str, Any]) -> None:
        told = Pass(
            at=at,
            outcome=Outcome(of["outcome"]),
            exit_bits=_count(of["exit_bits"]),
            took_ms=_whole(of["took_ms"]),
            explanation=_words(of["explanation"]),
        )
        explanation = sentence_number(self._db, told.explanation)
        # Not told where it was written before passes of one second were kept apart.
        nth = _whole(of.get("nth", 0))
        columns = ("at", "nth", "outcome", "exit_bits", "took_ms", "explanation")
        cells = (at, nth, told.outcome.value, told.exit_bits, told.took_ms, explanation)
        self._insert("pass", columns, cells)
        self.arrived.add(at)
        if of.get("counted"):
            self._counted.add(at)

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
            found = _count(found)
        about = (_text(of["unit"]), SignalKind(of["kind"]).value, _text(of["source"]))
        series = self._series(_text(of["signal"]), about)
        there = self._db.execute("SELECT 1 FROM fresh WHERE at = ? AND series = ?", (at, series)).fetchone()
        if there is None:
            cells = (series, at, rows.cell(found), _words(of["reason"]))
            self._insert("value", ("series", "at", "value", "reason"), cells, drive=False)

    def _beside(self, at: int, of: Mapping[str, Any]) -> None:
        packed = json.dumps(of["reading"], separators=(",", ":")).encode()
        packing.beside(packed)  # refuses what is no reading
        self._insert("beside", ("at", "packed"), (at, packed))

    def _evidence(self, at: int, of: Mapping[str, Any]) -> None:
        series = self._series(_text(of["signal"]), None)
        self._insert(
            "evidence",
            ("series", "day", "evidence"),
            (series, day_number(at), float(of["evidence"])),
            drive=False,
        )

    def _load(self, at: int, of: Mapping[str, Any]) -> None:
        histogram = {_whole(bin_): _whole(count) for bin_, count in of["histogram"]}
        self._insert(
            "io_day",
            ("day", "load_class", "direction", "rollups", "operations", "histogram"),
            (
                day_number(at),
                _whole(of["load_class"]),
                int(Direction(of["direction"])),
                _whole(of["rollups"]),
                _whole(of["operations"]),
                packing.histogram_packed(histogram),
            ),
        )

    def _finding(self, at: int, of: Mapping[str, Any]) -> None:
        signals, data = [_text(one) for one in of["signals"]], _data(of["data"])
        row = (
            _text(of["name"]), of["kind"], json.dumps(signals), at, of["calls"], of["cause"],
            _measure(of["evidence"]), _text(of["sentence"]), json.dumps(data),
        )  # fmt: skip  # one row, as its columns stand
        cells = rows.finding_row(rows.finding(row))
        closed = _count(of["closed"])
        there = self._db.execute(
            "SELECT 1 FROM finding WHERE drive = ? AND name = ?"
            " AND (since = ? OR (closed IS NULL AND ? IS NULL))",
            (self._drive, cells[0], at, closed),
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
            self._insert("finding", columns, (*cells, closed))

    def _call(self, at: int, of: Mapping[str, Any]) -> None:
        row = (
            at, of["word"], of["cause"], _measure(of["cause_probability"]), of["cause_second"],
            _text(of["reason"]), _text(of["rule"]), _measure(of["evidence"]),
        )  # fmt: skip  # one row, as its columns stand
        self._calls.append(rows.call(row))

    def _event(self, at: int, of: Mapping[str, Any]) -> None:
        entry = Entry(
            at=at, drive=self._drive, kind=_text(of["kind"]), text=_text(of["text"]), data=_data(of["data"])
        )
        cells = rows.entry_row(entry)
        there = self._db.execute(
            "SELECT 1 FROM day_book WHERE drive = ? AND at = ? AND kind = ? AND text = ?",
            (self._drive, at, entry.kind, cells[3]),
        ).fetchone()
        if there is None:
            self._insert("day_book", ("at", "drive", "kind", "text", "data"), cells, drive=False)

    def _copy(self, at: int, of: Mapping[str, Any]) -> None:
        self._insert("kept_state", ("at", "packed"), (at, packing.packed(_text(of["state"]))))
        self._state(at, of)

    def _state(self, at: int, of: Mapping[str, Any]) -> None:
        # Whether it may stand as it is, only he who knows the analyser can tell.
        self.states.append((at, _text(of["state"])))

    def settle(self) -> None:
        """Put in order what depends on all rows: counts of passes, calls, what is now."""
        self._settle_counts()
        self._settle_calls()
        self._settle_latest()
        self._db.execute(
            "UPDATE drive SET (passed_at, outcome, explanation) ="
            " (SELECT at, outcome, explanation FROM pass WHERE drive = number"
            " ORDER BY at DESC, nth DESC LIMIT 1)"
            " WHERE number = ? AND EXISTS (SELECT 1 FROM pass WHERE drive = number)",
            (self._drive,),
        )

    def _settle_counts(self) -> None:
        """Count the passes that fall behind the mark now and that neither side has counted."""
        if self._mark == self._own_mark:
            return
        uncounted = (self.before | self.arrived) - self._counted
        here = [at for at in uncounted if at < self._mark and not (at in self.before and at < self._own_mark)]
        self._db.executemany(
            "INSERT INTO pass_day (drive, day, outcome, passes, first, last)"
            " SELECT drive, at / 86400, outcome, 1, at, at FROM pass WHERE drive = ? AND at = ?"
            " ON CONFLICT (drive, day, outcome) DO UPDATE SET passes = passes + 1,"
            " first = min(first, excluded.first), last = max(last, excluded.last)",
            [(self._drive, at) for at in here],
        )
        self._db.execute(
            "INSERT OR REPLACE INTO thinned (what, number, before) VALUES ('pass', ?, ?)",
            (self._drive, self._mark),
        )

    def _settle_calls(self) -> None:
        """All calls in order of time: the last one stands."""
        kept = self._db.execute(
            "SELECT at, word, cause, cause_probability, cause_second, reason, rule, evidence FROM call"
            " WHERE drive = ? ORDER BY number",
            (self._drive,),
        ).fetchall()
        here = [rows.call(row) for row in kept]
        known = {(call.at, call.word) for call in here}
        arrived = [call for call in self._calls if (call.at, call.word) not in known]
        if not arrived:
            return
        self._db.execute("DELETE FROM call WHERE drive = ?", (self._drive,))
        columns = ("at", "word", "cause", "cause_probability", "cause_second", "reason", "rule", "evidence")
        for call in sorted((*here, *arrived), key=lambda call: call.at):
            self._insert("call", columns, rows.call_row(call))

    def _settle_latest(self) -> None:
        """What every signal is now, by its newest value; the series that has it is the current one."""
        newest: dict[str, tuple[int, int]] = {}
        series = self._db.execute(
            "SELECT number, signal FROM series WHERE drive = ? AND kind IS NOT NULL", (self._drive,)
        ).fetchall()
        for number, signal in series:
            found = self._db.execute(
                "SELECT at, value, reason FROM (SELECT at, value, reason FROM value WHERE series = ?1"
                " UNION ALL SELECT at, value, reason FROM fresh WHERE series = ?1) ORDER BY at DESC LIMIT 1",
                (number,),
            ).fetchone()
            if found is None:
                continue
            self._db.execute(
                "INSERT INTO latest (since, value, reason, series) VALUES (?, ?, ?, ?) ON CONFLICT (series)"
                " DO UPDATE SET since = excluded.since, value = excluded.value, reason = excluded.reason",
                (*found, number),
            )
            newest[signal] = max(newest.get(signal, (found[0], number)), (found[0], number))
        self._db.execute(
            "INSERT INTO latest (series, day, evidence) SELECT series, max(day), evidence FROM evidence"
            " WHERE series IN (SELECT number FROM series WHERE drive = ?) GROUP BY series ON CONFLICT (series)"
            " DO UPDATE SET day = excluded.day, evidence = excluded.evidence"
            " WHERE excluded.day > coalesce(day, -1)",
            (self._drive,),
        )
        for signal, (_, number) in newest.items():
            self._db.execute(
                "UPDATE series SET current = 0 WHERE drive = ? AND signal = ?", (self._drive, signal)
            )
            self._db.execute("UPDATE series SET current = 1 WHERE number = ?", (number,))
