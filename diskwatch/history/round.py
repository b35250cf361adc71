"""Writing one round of the watch into the history; whoever calls holds the transaction open around it."""

import sqlite3
from collections.abc import Iterable, Mapping, Sequence

from diskwatch.errors import HistoryError
from diskwatch.history import packing, rows
from diskwatch.records import (
    Call,
    Drive,
    DriveRound,
    Entry,
    Finding,
    KnownDrive,
    Pass,
    Place,
    Reading,
    Round,
    Value,
)
from diskwatch.units import DAY, day_number

WEEK = 7 * DAY
"""The last state of every such stretch since 1970 is kept, seconds."""

NOT_THERE = "it was not in this reading"
"""Why a signal that was read before is not known: no other value is stored with these words."""


def write_round(connection: sqlite3.Connection, round_: Round) -> None:
    """Write all that a round brought.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
        HistoryError: it speaks of a drive by another one's number; likewise.
    """
    file_past_days(connection, day_number(round_.at))
    for part in round_.drives:
        _write_part(connection, part, round_.at)
    write_entries(connection, round_.entries)


def write_entries(connection: sqlite3.Connection, entries: Iterable[Entry]) -> None:
    """Add to the day book."""
    connection.executemany(
        "INSERT INTO day_book (at, drive, kind, text, data) VALUES (?, ?, ?, ?, ?)",
        [rows.entry_row(entry) for entry in entries],
    )


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


def write_place(connection: sqlite3.Connection, number: int, place: Place, at: int) -> None:
    """Note where a drive is plugged in, where that is news."""
    here = (rows.text(place.device), rows.text_or_none(place.bay))
    before = connection.execute(
        "SELECT device, bay FROM plugged WHERE drive = ? ORDER BY since DESC LIMIT 1", (number,)
    ).fetchone()
    if before != here:
        connection.execute(
            "INSERT OR REPLACE INTO plugged (drive, since, device, bay) VALUES (?, ?, ?, ?)",
            (number, at, *here),
        )


def file_past_days(connection: sqlite3.Connection, today: int) -> None:
    """Move values and evidence of the days before into the order in which a long range reads at once."""
    midnight = today * DAY
    if connection.execute("SELECT 1 FROM fresh WHERE at < ? LIMIT 1", (midnight,)).fetchone():
        connection.execute(
            "INSERT OR REPLACE INTO value (series, at, value, reason) "
            "SELECT series, at, value, reason FROM fresh WHERE at < ? ORDER BY series, at",
            (midnight,),
        )
        connection.execute("DELETE FROM fresh WHERE at < ?", (midnight,))


def _write_part(connection: sqlite3.Connection, part: DriveRound, at: int) -> None:
    number = part.known.number
    explanation = sentence_number(connection, part.pass_.explanation)
    before = connection.execute("SELECT passed_at FROM drive WHERE number = ?", (number,)).fetchone()
    _write_drive(connection, part.known, part.pass_, explanation)
    write_place(connection, number, part.known.place, at)
    _write_pass(connection, number, part.pass_, explanation, latest=before == (part.pass_.at,))
    if part.pass_.reading is not None:
        _write_reading(connection, number, part.pass_.at, part.pass_.reading)
    if part.state is not None:
        _keep_copy(connection, number, part.pass_.at)
    write_judgement(connection, part, at)


def write_judgement(connection: sqlite3.Connection, part: DriveRound, at: int) -> None:
    """Write what is thought of a drive, without the pass that led to it.

    Args:
        connection: within a transaction.
        part: whose findings, evidence, call and state to write.
        at: when it was judged, UTC seconds since 1970.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    number = part.known.number
    _write_findings(connection, number, part.findings, at)
    _write_evidence(connection, number, part.evidence, at)
    if part.call is not None:
        _write_call(connection, number, part.call)
    if part.state is not None:
        _write_packed(connection, "analyser_state", number, part.pass_.at, packing.packed(part.state))


def _keep_copy(connection: sqlite3.Connection, number: int, at: int) -> None:
    """Keep the last state of a week that is over, as it is: what came later can be worked out from it again."""
    connection.execute(
        "INSERT OR IGNORE INTO kept_state (drive, at, packed)"
        " SELECT drive, at, packed FROM analyser_state WHERE drive = ? AND at / ? <> ? / ?",
        (number, WEEK, at, WEEK),
    )


def sentence_number(connection: sqlite3.Connection, words: str | None) -> int | None:
    """The number of an explanation, which is kept once however often it repeats; None for none."""
    if words is None:
        return None
    kept = rows.text(words)
    connection.execute("INSERT OR IGNORE INTO sentence (text) VALUES (?)", (kept,))
    (number,) = connection.execute("SELECT number FROM sentence WHERE text = ?", (kept,)).fetchone()
    return int(number)


def _write_drive(
    connection: sqlite3.Connection, known: KnownDrive, pass_: Pass, explanation: int | None
) -> None:
    # A drive that this very round met for the first time is taken up with it, or not at all.
    written = connection.execute(
        "INSERT INTO drive (wwn, model, serial, path, kind, firmware, capacity_bytes, rotation_rpm, device,"
        " bay, lives_here, passed_at, outcome, explanation, number, first_seen)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (number) DO UPDATE SET"
        " wwn = excluded.wwn, model = excluded.model, serial = excluded.serial, path = excluded.path,"
        " kind = excluded.kind, firmware = excluded.firmware, capacity_bytes = excluded.capacity_bytes,"
        " rotation_rpm = excluded.rotation_rpm, device = excluded.device, bay = excluded.bay,"
        " lives_here = excluded.lives_here, passed_at = excluded.passed_at, outcome = excluded.outcome,"
        " explanation = excluded.explanation WHERE first_seen = excluded.first_seen",
        (
            *rows.drive_row(known.drive, known.place),
            pass_.at,
            pass_.outcome.value,
            explanation,
            known.number,
            known.first_seen,
        ),
    )
    if written.rowcount != 1:
        # A watch that could not read the history counted from one: its drives must not grow onto these.
        raise HistoryError(
            f"drive number {known.number} is another drive in the history",
            hint="start the watch again, so that it knows the drives that are in it",
        )


def _write_pass(
    connection: sqlite3.Connection, number: int, pass_: Pass, explanation: int | None, *, latest: bool
) -> None:
    """Keep a pass, also one of a second that has one already.

    Only the drive's latest pass may be met again, word for word, and is then the same: a round is written once
    more where it was in doubt whether it had reached the disk.
    """
    row = (pass_.outcome.value, pass_.exit_bits, pass_.took_ms, explanation)
    there = connection.execute(
        "SELECT nth, outcome, exit_bits, took_ms, explanation FROM pass WHERE drive = ? AND at = ?"
        " ORDER BY nth DESC LIMIT 1",
        (number, pass_.at),
    ).fetchone()
    if there is not None and latest and there[1:] == row:
        return
    connection.execute(
        "INSERT INTO pass (drive, at, nth, outcome, exit_bits, took_ms, explanation)"
        " VALUES (?, ?, ?, ?, ?, ?, ?)",
        (number, pass_.at, 0 if there is None else there[0] + 1, *row),
    )


def _write_reading(connection: sqlite3.Connection, number: int, at: int, reading: Reading) -> None:
    before = {
        signal: (series, unit, kind, source, since, (value, reason))
        for series, signal, unit, kind, source, since, value, reason in connection.execute(
            "SELECT series.number, signal, unit, kind, source, since, value, reason"
            " FROM series JOIN latest ON latest.series = series.number WHERE drive = ? AND current",
            (number,),
        )
    }
    changed: list[tuple[int, int, rows.Cell, str | None]] = []
    # By name, so that a doubled one cannot cost the whole round.
    for value in {value.signal: value for value in reading.values}.values():
        now = (rows.cell(value.value), rows.text_or_none(value.reason))
        about = (rows.text(value.unit), value.kind.value, rows.text(value.source))
        found = before.get(rows.text(value.signal))
        series = _series(connection, number, value, about, None if found is None else found[:4])
        same_series = found is not None and found[0] == series
        if not (same_series and found is not None and _unchanged(found[4], found[5], now)):
            changed.append((at, series, *now))
    read = {rows.text(value.signal) for value in reading.values}
    for signal, (series, *_, since, known) in before.items():
        # What is no longer read is no longer known; since is None for what only ledgers follow.
        if signal not in read and since is not None and known[0] is not None:
            changed.append((at, series, None, NOT_THERE))
    connection.executemany(
        "INSERT OR REPLACE INTO fresh (at, series, value, reason) VALUES (?, ?, ?, ?)", changed
    )
    connection.executemany(
        "INSERT INTO latest (since, series, value, reason) VALUES (?, ?, ?, ?)"
        " ON CONFLICT (series) DO UPDATE"
        " SET since = excluded.since, value = excluded.value, reason = excluded.reason",
        changed,
    )
    _write_packed(connection, "last_reading", number, at, packing.reading_packed(reading))
    _write_beside(connection, number, at, packing.beside_bytes(reading))


def _write_beside(connection: sqlite3.Connection, number: int, at: int, packed: bytes) -> None:
    known = connection.execute(
        "SELECT packed FROM beside WHERE drive = ? ORDER BY at DESC LIMIT 1", (number,)
    ).fetchone()
    if known != (packed,):
        connection.execute(
            "INSERT OR REPLACE INTO beside (drive, at, packed) VALUES (?, ?, ?)", (number, at, packed)
        )


def _unchanged(
    since: int | None, before: tuple[rows.Cell, str | None], now: tuple[rows.Cell, str | None]
) -> bool:
    """Whether a value need not be stored: the one decision of what "on change" means."""
    return since is not None and before == now


def _series(
    connection: sqlite3.Connection,
    drive: int,
    value: Value,
    about: tuple[str, str, str],
    before: tuple[int, str | None, str | None, str | None] | None,
) -> int:
    """The number of a signal's series; a signal whose unit changed starts a new one."""
    if before is not None:
        series, unit, kind, source = before
        if (unit, kind, source) == about:
            return series
        if unit in {None, about[0]}:
            connection.execute(
                "UPDATE series SET unit = ?, kind = ?, source = ? WHERE number = ?", (*about, series)
            )
            return series
        connection.execute("UPDATE series SET current = 0 WHERE number = ?", (series,))
    made = connection.execute(
        "INSERT INTO series (drive, signal, unit, kind, source) VALUES (?, ?, ?, ?, ?) RETURNING number",
        (drive, rows.text(value.signal), *about),
    ).fetchone()
    return int(made[0])


def _write_findings(connection: sqlite3.Connection, number: int, findings: Sequence[Finding], at: int) -> None:
    standing = {
        row[1]: (row[0], row[1:])
        for row in connection.execute(
            "SELECT number, name, kind, signals, since, calls, cause, evidence, sentence, data"
            " FROM finding WHERE drive = ? AND closed IS NULL",
            (number,),
        )
    }
    for row in map(rows.finding_row, {finding.name: finding for finding in findings}.values()):
        known = standing.pop(row[0], None)
        if known is None:
            connection.execute(
                "INSERT INTO finding"
                " (drive, name, kind, signals, since, calls, cause, evidence, sentence, data)"
                " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
                (number, *row),
            )
        elif known[1] != row:
            connection.execute(
                "UPDATE finding SET name = ?, kind = ?, signals = ?, since = ?, calls = ?, cause = ?,"
                " evidence = ?, sentence = ?, data = ? WHERE number = ?",
                (*row, known[0]),
            )
    connection.executemany(
        "UPDATE finding SET closed = ? WHERE number = ?", [(at, ended) for ended, _ in standing.values()]
    )


def _write_evidence(
    connection: sqlite3.Connection, number: int, evidence: Mapping[str, float], at: int
) -> None:
    """Keep the last evidence of each day: today's in ``latest``, from where the next day moves it on."""
    today = day_number(at)
    series = dict(
        connection.execute(
            "SELECT signal, number FROM series WHERE drive = ? AND current", (number,)
        ).fetchall()
    )
    named = {rows.text(signal): days for signal, days in evidence.items()}
    for name in named.keys() - series.keys():
        # Some ledgers follow what no drive reports, such as a service time.
        (series[name],) = connection.execute(
            "INSERT INTO series (drive, signal) VALUES (?, ?) RETURNING number", (number, name)
        ).fetchone()
    connection.executemany(
        "INSERT OR REPLACE INTO evidence (series, day, evidence)"
        " SELECT series, day, evidence FROM latest WHERE series = ? AND day <> ? AND evidence IS NOT NULL",
        [(series[name], today) for name in named],
    )
    connection.executemany(
        "INSERT INTO latest (series, day, evidence) VALUES (?, ?, ?)"
        " ON CONFLICT (series) DO UPDATE SET day = excluded.day, evidence = excluded.evidence",
        [(series[name], today, days) for name, days in named.items()],
    )


def _write_call(connection: sqlite3.Connection, number: int, call: Call) -> None:
    """Keep changes of call; a call that stands on has its reason and numbers brought up to date."""
    row = rows.call_row(call)
    standing = connection.execute(
        "SELECT number, at, word, cause, cause_probability, cause_second, reason, rule, evidence"
        " FROM call WHERE drive = ? ORDER BY number DESC LIMIT 1",
        (number,),
    ).fetchone()
    if standing is not None and standing[1:] == row:
        return
    if standing is not None and standing[1:3] == row[:2]:
        connection.execute(
            "UPDATE call SET at = ?, word = ?, cause = ?, cause_probability = ?, cause_second = ?,"
            " reason = ?, rule = ?, evidence = ? WHERE number = ?",
            (*row, standing[0]),
        )
    else:
        connection.execute(
            "INSERT INTO call"
            " (drive, at, word, cause, cause_probability, cause_second, reason, rule, evidence)"
            " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)",
            (number, *row),
        )


_REPLACE_PACKED = {
    "analyser_state": (
        "SELECT 1 FROM analyser_state WHERE drive = ? AND packed = ?",
        "INSERT OR REPLACE INTO analyser_state (drive, at, packed) VALUES (?, ?, ?)",
    ),
    "last_reading": (
        "SELECT 1 FROM last_reading WHERE drive = ? AND packed = ?",
        "INSERT OR REPLACE INTO last_reading (drive, at, packed) VALUES (?, ?, ?)",
    ),
}


def _write_packed(connection: sqlite3.Connection, table: str, number: int, at: int, packed: bytes) -> None:
    same, replace = _REPLACE_PACKED[table]
    if connection.execute(same, (number, packed)).fetchone() is None:
        connection.execute(replace, (number, at, packed))
