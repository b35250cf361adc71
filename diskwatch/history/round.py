"""Writing one round of the watch into the history; whoever calls holds the transaction open around it."""

import sqlite3
from collections.abc import Iterable

from diskwatch.errors import HistoryUnfit
from diskwatch.history import packing, rows
from diskwatch.history.answers import write_answer
from diskwatch.history.counting import count, counted_before
from diskwatch.history.judgement import keep_copy, write_judgement
from diskwatch.history.moments import Moment
from diskwatch.history.stating import file_past_days, says_nothing_new, write_values
from diskwatch.history.ways import write_ways
from diskwatch.records import Drive, DriveRound, Entry, KnownDrive, Pass, Place, Round
from diskwatch.units import day_number

_LAST_MADE = (
    "SELECT pass.at, pass.outcome, exit_bits, took_ms, text, analyser_state.packed, last_reading.packed"
    " FROM drive"
    " JOIN pass ON pass.drive = drive.number AND pass.at = passed_at"
    " LEFT JOIN sentence ON sentence.number = pass.explanation"
    " LEFT JOIN analyser_state ON analyser_state.drive = drive.number"
    " LEFT JOIN last_reading ON last_reading.drive = drive.number"
    " WHERE drive.number = ? AND passed_at = ? ORDER BY nth DESC LIMIT 1"
)


def write_round(connection: sqlite3.Connection, round_: Round) -> None:
    """Write all that a round brought.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
        HistoryUnfit: it speaks of a drive by another one's number; likewise.
    """
    if _there_already(connection, round_):
        for part in round_.drives:
            write_judgement(connection, part, round_.at)
        return
    file_past_days(connection, day_number(round_.at))
    for part in round_.drives:
        _write_part(connection, part, round_.at)
    write_entries(connection, round_.entries)
    write_ways(connection, round_.ways, round_.at)


def write_entries(connection: sqlite3.Connection, entries: Iterable[Entry]) -> None:
    """Add to the day book."""
    connection.executemany(
        "INSERT INTO day_book (at, drive, kind, text, data) VALUES (?, ?, ?, ?, ?)",
        [rows.entry_row(entry) for entry in entries],
    )


def known_drives(connection: sqlite3.Connection) -> tuple[KnownDrive, ...]:
    """All drives that were ever seen, in the order of their numbers."""
    found = connection.execute(
        "SELECT number, wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
        " device, bay, lives_here, first_seen FROM drive ORDER BY number"
    ).fetchall()
    return tuple(rows.known_drive(row) for row in found)


def admit(connection: sqlite3.Connection, drive: Drive, place: Place, at: int) -> KnownDrive:
    """Take up a drive that was never seen before, first seen at a time in UTC seconds since 1970."""
    (number,) = connection.execute(
        "INSERT INTO drive (wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
        " device, bay, lives_here, first_seen) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"
        " RETURNING number",
        (*rows.drive_row(drive, place), at),
    ).fetchone()
    write_place(connection, number, place, at)
    return KnownDrive(number=number, drive=drive, place=place, first_seen=at)


def write_alone(connection: sqlite3.Connection, part: DriveRound) -> None:
    """Write a drive with what is thought of it, and no pass, where this history does not know it yet."""
    known, at = part.known, part.pass_.at
    written = connection.execute(
        "INSERT INTO drive (wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm,"
        " device, bay, lives_here, number, first_seen) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"
        " ON CONFLICT (number) DO NOTHING",
        (*rows.drive_row(known.drive, known.place), known.number, known.first_seen),
    )
    if written.rowcount != 1:
        return
    write_place(connection, known.number, known.place, at)
    if part.state is not None:
        write_judgement(connection, part, at)
        # The passes that led to it stand elsewhere: from here on it can be worked out again.
        connection.execute(
            "INSERT INTO kept_state (drive, at, packed, turn)"
            " SELECT drive, at, packed, turn FROM analyser_state WHERE drive = ?",
            (known.number,),
        )


def write_place(connection: sqlite3.Connection, number: int, place: Place, at: int) -> None:
    """Note where a drive is plugged in, where that is news."""
    here = (rows.text(place.device), rows.text_or_none(place.bay))
    before = connection.execute(
        "SELECT device, bay FROM plugged WHERE drive = ? AND since <= ? ORDER BY since DESC LIMIT 1",
        (number, at),
    ).fetchone()
    if before != here:
        connection.execute(
            "INSERT OR REPLACE INTO plugged (drive, since, device, bay) VALUES (?, ?, ?, ?)",
            (number, at, *here),
        )


def _there_already(connection: sqlite3.Connection, round_: Round) -> bool:
    """Whether these very passes were the last to be written: a round in doubt may come once more."""
    if not round_.drives or not all(_stands(connection, part) for part in round_.drives):
        return False
    told = connection.execute(
        "SELECT at, drive, kind, text, data FROM day_book ORDER BY number DESC LIMIT ?", (len(round_.entries),)
    ).fetchall()
    return told[::-1] == [rows.entry_row(entry) for entry in round_.entries]


def _stands(connection: sqlite3.Connection, part: DriveRound) -> bool:
    pass_ = part.pass_
    row = (pass_.at, pass_.outcome.value, pass_.exit_bits, pass_.took_ms, rows.text_or_none(pass_.explanation))
    number = part.known.number
    latest = connection.execute(_LAST_MADE, (number, pass_.at)).fetchone()
    if latest is None or latest[:5] != row:
        return False
    if part.state is not None and latest[5] != packing.packed(part.state):
        return False
    return pass_.reading is None or (
        latest[6] == packing.reading_packed(pass_.reading)
        and says_nothing_new(connection, number, pass_.reading, pass_.heard)
    )


def _write_part(connection: sqlite3.Connection, part: DriveRound, at: int) -> None:
    number = part.known.number
    explanation = sentence_number(connection, part.pass_.explanation)
    turn = _turn(connection, number, part.pass_.at)
    _write_drive(connection, part.known, part.pass_, explanation, turn)
    write_place(connection, number, part.known.place, at)
    moment = _write_pass(connection, number, part.pass_, explanation, turn)
    write_values(connection, number, moment, part.pass_.reading, part.pass_.heard)
    if part.pass_.answer is not None:
        call = None if part.call is None else part.call.word.value
        write_answer(connection, number, part.pass_.at, part.pass_.answer, call)
    if part.state is not None:
        keep_copy(connection, number, part.pass_.at)
    write_judgement(connection, part, at)


def _turn(connection: sqlite3.Connection, number: int, at: int) -> int:
    """How often the clock has been set back under a drive, with this pass."""
    found = connection.execute("SELECT turn, passed_at FROM drive WHERE number = ?", (number,)).fetchone()
    if found is None:
        return 0
    turn, before = found
    return int(turn) + (before is not None and at < before)


def sentence_number(connection: sqlite3.Connection, words: str | None) -> int | None:
    """The number of an explanation, which is kept once however often it repeats; None for none."""
    if words is None:
        return None
    kept = rows.text(words)
    connection.execute("INSERT OR IGNORE INTO sentence (text) VALUES (?)", (kept,))
    (number,) = connection.execute("SELECT number FROM sentence WHERE text = ?", (kept,)).fetchone()
    return int(number)


def _write_drive(
    connection: sqlite3.Connection, known: KnownDrive, pass_: Pass, explanation: int | None, turn: int
) -> None:
    # A drive that this very round met for the first time is taken up with it, or not at all.
    written = connection.execute(
        "INSERT INTO drive (wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm, device,"
        " bay, lives_here, passed_at, outcome, explanation, turn, number, first_seen)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (number) DO UPDATE SET"
        " wwn = excluded.wwn, model = excluded.model, serial = excluded.serial, path = excluded.path,"
        " kind = excluded.kind, firmware = excluded.firmware, capacity_bytes = excluded.capacity_bytes,"
        " rotation_rpm = excluded.rotation_rpm, device = excluded.device, bay = excluded.bay,"
        " lives_here = excluded.lives_here, passed_at = excluded.passed_at, outcome = excluded.outcome,"
        " explanation = excluded.explanation, turn = excluded.turn WHERE first_seen = excluded.first_seen",
        (
            *rows.drive_row(known.drive, known.place),
            pass_.at,
            pass_.outcome.value,
            explanation,
            turn,
            known.number,
            known.first_seen,
        ),
    )
    if written.rowcount != 1:
        # A watch that could not read the history counted from one: its drives must not grow onto these.
        raise HistoryUnfit(
            f"drive number {known.number} is another drive in the history",
            hint="start the watch again, so that it knows the drives that are in it",
        )


def _write_pass(
    connection: sqlite3.Connection, number: int, pass_: Pass, explanation: int | None, turn: int
) -> Moment:
    """Keep a pass, also one of a second that has one already."""
    (nth,) = connection.execute(
        "SELECT coalesce(max(nth) + 1, 0) FROM pass WHERE drive = ? AND at = ?", (number, pass_.at)
    ).fetchone()
    connection.execute(
        "INSERT INTO pass (drive, at, nth, outcome, exit_bits, took_ms, explanation, turn)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
        (number, pass_.at, nth, pass_.outcome.value, pass_.exit_bits, pass_.took_ms, explanation, turn),
    )
    if pass_.at < counted_before(connection, number):
        # A clock that lost its battery makes passes of days that are counted already.
        count(connection, number, [(pass_.at, pass_.outcome.value)])
    return Moment(turn=turn, at=pass_.at, nth=nth)
