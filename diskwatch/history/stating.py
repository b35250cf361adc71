"""What a pass read, stated on change: a value holds until the next one, in the order of the passes."""

import sqlite3
from collections.abc import Iterable, Sequence
from operator import attrgetter

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


_STANDS = (
    "SELECT series.number, since, signal, unit, kind, source, value, reason"
    " FROM series JOIN latest ON latest.series = series.number WHERE drive = ? AND current"
)

_STATED = attrgetter("unit", "kind", "source", "value", "reason")
"""What a value says, as the end of such a row does."""

_NEVER = (None,) * 8
"""What stands of a signal that was never read."""


def says_nothing_new(
    connection: sqlite3.Connection, number: int, reading: Reading, heard: Sequence[Value] = ()
) -> bool:
    """Whether every signal is what a pass says of it, and no known one is missing from it.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    now = {row[2]: row[6:] for row in connection.execute(_STANDS, (number,))}
    said = _by_name((*reading.values, *heard))
    return all(now.get(signal) == _cells(one) for signal, one in said.items()) and all(
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
    said = _by_name((*(() if reading is None else reading.values), *heard))
    before = {row[2]: row for row in connection.execute(_STANDS, (number,))}
    changed: list[tuple[int, int, rows.Cell, str | None]] = []
    for signal, one in said.items():
        stands = before.get(signal, _NEVER)
        # What only ledgers follow has no since: nothing was read of it yet.
        known = stands[1] is not None
        # Most signals stand still at most passes, and one look tells; others are looked at as they are kept.
        if known and stands[3:] == _STATED(one):
            continue
        series = _series(connection, number, one, stands[0], stands[3:6])
        if not (known and series == stands[0] and stands[6:] == _cells(one)):
            changed.append((moment.at, series, *_cells(one)))
    for signal, (series, since, _, _, _, source, value, _) in before.items():
        if signal in said or (reading is None and source not in SENSES):
            continue
        # What is no longer read is no longer known.
        if since is not None and value is not None:
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


def _by_name(values: Iterable[Value]) -> dict[str, Value]:
    """What a pass says, so that a doubled name cannot cost the whole round."""
    return {rows.text(one.signal): one for one in values}


def _cells(said: Value) -> tuple[rows.Cell, str | None]:
    return rows.cell(said.value), rows.text_or_none(said.reason)


def _write_last(connection: sqlite3.Connection, number: int, at: int, packed: bytes) -> None:
    connection.execute(
        "INSERT INTO last_reading (drive, at, packed) VALUES (?, ?, ?) ON CONFLICT (drive) DO UPDATE"
        " SET at = excluded.at, packed = excluded.packed WHERE packed <> excluded.packed",
        (number, at, packed),
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


def _series(
    connection: sqlite3.Connection,
    drive: int,
    said: Value,
    series: int | None,
    before: tuple[str | None, str | None, str | None],
) -> int:
    """The number of a signal's series; a signal whose unit changed starts a new one."""
    about = (rows.text(said.unit), said.kind.value, rows.text(said.source))
    if series is not None:
        if before == about:
            return series
        if before[0] in {None, about[0]}:
            connection.execute(
                "UPDATE series SET unit = ?, kind = ?, source = ? WHERE number = ?", (*about, series)
            )
            return series
        connection.execute("UPDATE series SET current = 0 WHERE number = ?", (series,))
    made = connection.execute(
        "INSERT INTO series (drive, signal, unit, kind, source) VALUES (?, ?, ?, ?, ?) RETURNING number",
        (drive, rows.text(said.signal), *about),
    ).fetchone()
    return int(made[0])
