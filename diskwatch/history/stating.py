"""What a pass read, stated on change: a value holds until the next one, in the order of the passes."""

import sqlite3
from collections.abc import Iterable, Sequence

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


# A row of what stands goes on, behind its series and since when, as `_Said` does.
_STANDS = (
    "SELECT series.number, since, signal, unit, kind, source, value, reason"
    " FROM series JOIN latest ON latest.series = series.number WHERE drive = ? AND current"
)

_NEVER = (None,) * 8
"""The same of a signal that was never read."""

_Said = tuple[str, str, str, str, rows.Cell, str | None]
"""Signal, unit, kind, source, value and reason, as their columns keep them."""


def says_nothing_new(
    connection: sqlite3.Connection, number: int, reading: Reading, heard: Sequence[Value] = ()
) -> bool:
    """Whether every signal is what a pass says of it, and no known one is missing from it.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    now = {row[2]: row[6:] for row in connection.execute(_STANDS, (number,))}
    said = _said((*reading.values, *heard))
    return all(now.get(signal) == says[4:] for signal, says in said.items()) and all(
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
    said = _said((*(() if reading is None else reading.values), *heard))
    before = {row[2]: row for row in connection.execute(_STANDS, (number,))}
    changed: list[tuple[int, int, rows.Cell, str | None]] = []
    for signal, says in said.items():
        stands = before.get(signal, _NEVER)
        # Most signals stand still at most passes, and one look tells; what only ledgers follow has no since.
        if stands[2:] == says and stands[1] is not None:
            continue
        series = _series(connection, number, says, stands[0], stands[3:6])
        if series != stands[0] or stands[1] is None or stands[6:] != says[4:]:
            changed.append((moment.at, series, *says[4:]))
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


def _said(values: Iterable[Value]) -> dict[str, _Said]:
    """What a pass says, by name, so that a doubled one cannot cost the whole round."""
    return {
        (signal := rows.text(one.signal)): (
            signal,
            rows.text(one.unit),
            one.kind.value,
            rows.text(one.source),
            rows.cell(one.value),
            rows.text_or_none(one.reason),
        )
        for one in values
    }


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
    says: _Said,
    series: int | None,
    before: tuple[str | None, str | None, str | None],
) -> int:
    """The number of a signal's series; a signal whose unit changed starts a new one."""
    about = says[1:4]
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
        (drive, says[0], *about),
    ).fetchone()
    return int(made[0])
