"""What a pass read, stated on change: a value holds until the next one, in the order of the passes."""

import sqlite3
from collections.abc import Sequence

from diskwatch.history import packing, rows
from diskwatch.history.moments import Moment
from diskwatch.records import SENSES, Reading, Value
from diskwatch.units import DAY

NOT_THERE = "it was not in this reading"
"""Why a signal that was read before is not known: no other value is stored with these words."""


def file_past_days(connection: sqlite3.Connection, today: int) -> None:
    """Move values and evidence of the days before into the order in which a long range reads at once."""
    midnight = today * DAY
    if connection.execute("SELECT 1 FROM fresh WHERE at < ? LIMIT 1", (midnight,)).fetchone():
        connection.execute(
            "INSERT OR REPLACE INTO value (series, at, nth, value, reason, turn)"
            " SELECT series, at, nth, value, reason, turn FROM fresh WHERE at < ? ORDER BY series, at, nth",
            (midnight,),
        )
        connection.execute("DELETE FROM fresh WHERE at < ?", (midnight,))


def says_nothing_new(
    connection: sqlite3.Connection, number: int, reading: Reading, heard: Sequence[Value] = ()
) -> bool:
    """Whether every signal is what a pass says of it, and no known one is missing from it.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    now = {
        signal: (value, reason)
        for signal, value, reason in connection.execute(
            "SELECT signal, value, reason FROM series JOIN latest ON latest.series = series.number"
            " WHERE drive = ? AND current",
            (number,),
        )
    }
    said = {
        rows.text(one.signal): (rows.cell(one.value), rows.text_or_none(one.reason))
        for one in (*reading.values, *heard)
    }
    return all(now.get(signal) == cells for signal, cells in said.items()) and all(
        signal in said or value is None for signal, (value, _) in now.items()
    )


def write_values(
    connection: sqlite3.Connection,
    number: int,
    moment: Moment,
    reading: Reading | None,
    heard: Sequence[Value] = (),
) -> None:
    """Write what a pass read, and what was heard of the drive by then, where it is news.

    Args:
        connection: within a transaction.
        number: the drive's number.
        moment: which of its passes it was.
        reading: what it read; None where it brought none, so that what was read before still stands.
        heard: what the machine's other senses count of it.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    values = {value.signal: value for value in (*(() if reading is None else reading.values), *heard)}
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
    for value in values.values():
        now = (rows.cell(value.value), rows.text_or_none(value.reason))
        about = (rows.text(value.unit), value.kind.value, rows.text(value.source))
        found = before.get(rows.text(value.signal))
        series = _series(connection, number, value, about, None if found is None else found[:4])
        same_series = found is not None and found[0] == series
        if not (same_series and found is not None and _unchanged(found[4], found[5], now)):
            changed.append((moment.at, series, *now))
    read = {rows.text(signal) for signal in values}
    for signal, (series, _, _, source, since, known) in before.items():
        if reading is None and source not in SENSES:
            continue
        # What is no longer read is no longer known; since is None for what only ledgers follow.
        if signal not in read and since is not None and known[0] is not None:
            changed.append((moment.at, series, None, NOT_THERE))
    connection.executemany(
        "INSERT INTO fresh (at, series, value, reason, nth, turn) VALUES (?, ?, ?, ?, ?, ?)",
        [(*row, moment.nth, moment.turn) for row in changed],
    )
    connection.executemany(
        "INSERT INTO latest (since, series, value, reason) VALUES (?, ?, ?, ?)"
        " ON CONFLICT (series) DO UPDATE"
        " SET since = excluded.since, value = excluded.value, reason = excluded.reason",
        changed,
    )
    if reading is not None:
        _write_last(connection, number, moment.at, packing.reading_packed(reading))
        _write_beside(connection, number, moment, packing.beside_bytes(reading))


def _write_last(connection: sqlite3.Connection, number: int, at: int, packed: bytes) -> None:
    known = connection.execute("SELECT packed FROM last_reading WHERE drive = ?", (number,)).fetchone()
    if known != (packed,):
        connection.execute(
            "INSERT OR REPLACE INTO last_reading (drive, at, packed) VALUES (?, ?, ?)", (number, at, packed)
        )


# The newest of this turn stands at the end of the key; a turn's first pass states all of it anew.
_BESIDE = "SELECT packed FROM beside WHERE drive = ? AND turn = ? ORDER BY at DESC, nth DESC LIMIT 1"


def _write_beside(connection: sqlite3.Connection, number: int, moment: Moment, packed: bytes) -> None:
    known = connection.execute(_BESIDE, (number, moment.turn)).fetchone()
    if known != (packed,):
        connection.execute(
            "INSERT INTO beside (drive, at, nth, packed, turn) VALUES (?, ?, ?, ?, ?)",
            (number, moment.at, moment.nth, packed, moment.turn),
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
