"""What can be asked of a history's past, each question answered from an index.

Every function raises sqlite3.Error where the history cannot be read and ValueError where it holds what cannot
be right.
"""

import json
import sqlite3
from collections.abc import Collection

from diskwatch.history import packing, rows
from diskwatch.history.counting import counted_before
from diskwatch.records import Entry, IoSpan, Outcome, Pass, PassDay, Reading
from diskwatch.units import DAY, day_number

_EVER = -(2**63)

_DAY_BOOK = (
    "SELECT at, drive, kind, text, data FROM day_book WHERE at >= :since"
    " AND (:kinds IS NULL OR kind IN (SELECT value FROM json_each(:kinds)))"
    " ORDER BY at DESC, number DESC LIMIT :limit"
)
_DAY_BOOK_OF_DRIVE = (
    "SELECT at, drive, kind, text, data FROM day_book WHERE drive = :drive AND at >= :since"
    " AND (:kinds IS NULL OR kind IN (SELECT value FROM json_each(:kinds)))"
    " ORDER BY at DESC, number DESC LIMIT :limit"
)
_PASSES = (
    "SELECT at, outcome, exit_bits, took_ms, text FROM pass"
    " LEFT JOIN sentence ON sentence.number = pass.explanation"
    " WHERE drive = ? AND at >= ? ORDER BY at DESC, nth DESC LIMIT ?"
)
_COUNTED = (
    "SELECT day, outcome, passes, first, last FROM pass_day WHERE drive = ? AND day >= ? ORDER BY day, outcome"
)
_UNCOUNTED = (
    "SELECT at / ?1 AS day, outcome, count(*), min(at), max(at) FROM pass WHERE drive = ?2 AND at >= ?3"
    " GROUP BY day, outcome ORDER BY day, outcome"
)
_SERIES = "SELECT number FROM series WHERE drive = ? AND signal = ? AND current"
_SERIES_EVER = "SELECT number FROM series WHERE drive = ? AND signal = ? ORDER BY number"
_HELD = (
    "SELECT max(at) FROM (SELECT max(at) AS at FROM value WHERE series = :series AND at <= :since"
    " UNION ALL SELECT max(at) FROM fresh WHERE series = :series AND at <= :since)"
)
_VALUES = (
    "SELECT at, nth, value FROM value WHERE series = :series AND at >= :since"
    " UNION SELECT at, nth, value FROM fresh WHERE at >= :since AND series = :series ORDER BY at, nth"
)
# Where the clock was set back, the day that goes on stands in both; the one in latest is the later one.
_EVIDENCE = (
    "SELECT day, evidence, 0 AS goes_on FROM evidence WHERE series = :series AND day >= :day"
    " UNION ALL SELECT day, evidence, 1 FROM latest"
    " WHERE series = :series AND day >= :day AND evidence IS NOT NULL ORDER BY goes_on"
)
# The drives' few series lead, so that each range of days is one stretch of the table.
_STRONGEST = (
    "SELECT drive, day, max(evidence) FROM ("
    "SELECT series.drive AS drive, kept.day AS day, kept.evidence AS evidence"
    " FROM series CROSS JOIN evidence AS kept ON kept.series = series.number AND kept.day >= :day"
    " UNION ALL SELECT series.drive, latest.day, latest.evidence"
    " FROM latest JOIN series ON series.number = latest.series"
    " WHERE latest.evidence IS NOT NULL AND latest.day >= :day"
    ") GROUP BY drive, day ORDER BY drive, day"
)
_TRAFFIC = (
    "SELECT drive, at + 60, span_ms, reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms"
    " FROM io_minute WHERE slot >= ? AND slot < ? AND drive = ? ORDER BY slot"
)


def day_book(
    connection: sqlite3.Connection,
    since: int | None,
    drive: int | None,
    kinds: Collection[str] | None,
    limit: int | None,
) -> tuple[Entry, ...]:
    """What happened, oldest first; with a limit the newest so many."""
    found = connection.execute(
        _DAY_BOOK if drive is None else _DAY_BOOK_OF_DRIVE,
        {
            "since": _from(since),
            "drive": drive,
            "kinds": None if kinds is None else json.dumps(sorted(kinds)),
            "limit": _up_to(limit),
        },
    ).fetchall()
    return tuple(rows.entry(row) for row in reversed(found))


def passes(
    connection: sqlite3.Connection, drive: int, since: int | None, limit: int | None
) -> tuple[Pass, ...]:
    """How asking a drive went, oldest first; with a limit the newest so many."""
    found = connection.execute(_PASSES, (drive, _from(since), _up_to(limit))).fetchall()
    return tuple(rows.past_pass(row) for row in reversed(found))


def pass_days(connection: sqlite3.Connection, drive: int, since: int | None) -> tuple[PassDay, ...]:
    """How many passes of each day ended how, oldest first, thinned or not."""
    day = _EVER if since is None else day_number(since)
    counted = connection.execute(_COUNTED, (drive, day)).fetchall()
    # Passes before the mark are in pass_day already, also those few that still stand by themselves.
    begin = max(counted_before(connection, drive), day * DAY if since is not None else _EVER)
    found = connection.execute(_UNCOUNTED, (DAY, drive, begin)).fetchall()
    days = {row[:2]: row for row in counted}
    for row in found:
        days[row[:2]] = _added(days.get(row[:2]), row)
    if counted and found and found[0][0] <= counted[-1][0]:
        days = dict(sorted(days.items()))
    outcomes = {outcome: Outcome(outcome) for outcome in {outcome for _, outcome in days}}
    return tuple(
        PassDay(day=day, outcome=outcomes[outcome], passes=passes, first=first, last=last)
        for day, outcome, passes, first, last in days.values()
    )


def _added(one: rows.Row | None, other: rows.Row) -> rows.Row:
    """The day in which the mark stands, of which a part is counted and a part is not."""
    if one is None:
        return other
    return (*other[:2], one[2] + other[2], min(one[3], other[3]), max(one[4], other[4]))


def series(
    connection: sqlite3.Connection, drive: int, signal: str, since: int | None
) -> tuple[tuple[int, int | str | None], ...]:
    """A signal's changes, oldest first, beginning with the value that held at ``since``."""
    number = connection.execute(_SERIES, (drive, rows.text(signal))).fetchone()
    if number is None:
        return ()
    first = _from(since)
    (held,) = connection.execute(_HELD, {"series": number[0], "since": first}).fetchone()
    found = connection.execute(
        _VALUES, {"series": number[0], "since": first if held is None else held}
    ).fetchall()
    return tuple((at, rows.value(kept)) for at, _, kept in found)


def evidence(
    connection: sqlite3.Connection, drive: int, signal: str, since: int | None
) -> tuple[tuple[int, float], ...]:
    """A ledger's evidence by day, oldest first; the ledger goes on where a signal's unit became another."""
    days: dict[int, float] = {}
    for (number,) in connection.execute(_SERIES_EVER, (drive, rows.text(signal))).fetchall():
        first = _EVER if since is None else day_number(since)
        found = connection.execute(_EVIDENCE, {"series": number, "day": first}).fetchall()
        days.update({day: worth for day, worth, _ in found})
    return tuple(sorted(days.items()))


def strongest(connection: sqlite3.Connection, since: int) -> dict[int, tuple[tuple[int, float], ...]]:
    """The strongest evidence of any of its ledgers by drive and day, oldest first."""
    days: dict[int, list[tuple[int, float]]] = {}
    for drive, day, worth in connection.execute(_STRONGEST, {"day": day_number(since)}):
        days.setdefault(drive, []).append((day, worth))
    return {drive: tuple(found) for drive, found in days.items()}


def traffic(connection: sqlite3.Connection, drive: int, since: int, until: int) -> tuple[IoSpan, ...]:
    """A drive's minutes, oldest first."""
    found = connection.execute(_TRAFFIC, (rows.slot(since), rows.slot(until + 59), drive)).fetchall()
    return tuple(rows.span(row) for row in found)


def last_reading(connection: sqlite3.Connection, drive: int) -> Reading | None:
    """What was last read beside the values."""
    found = connection.execute("SELECT packed FROM last_reading WHERE drive = ?", (drive,)).fetchone()
    return None if found is None else packing.reading(found[0])


def state(connection: sqlite3.Connection, drive: int) -> str | None:
    """The analyser's state."""
    found = connection.execute("SELECT packed FROM analyser_state WHERE drive = ?", (drive,)).fetchone()
    return None if found is None else packing.unpacked(found[0])


def _from(since: int | None) -> int:
    return _EVER if since is None else since


def _up_to(limit: int | None) -> int:
    return -1 if limit is None else limit
