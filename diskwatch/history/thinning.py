"""Thinning in small bites: each a transaction of its own, short enough that no round waits for it.

What is thinned, and when, says `diskwatch.history.keeping`. How far each series and each drive has come stands
in ``thinned``, so that a bite begins where the last one ended, and nothing is counted twice.
"""

import sqlite3
from collections.abc import Callable, Iterable
from typing import Literal

from diskwatch.history import rows
from diskwatch.history.counting import NOTHING_YET, count, counted_before, set_counted
from diskwatch.history.keeping import DETAIL_COPIES, DETAIL_DAYS, MINUTE_DAYS, Daily, daily
from diskwatch.history.traffic import FIVE, MINUTE, stored_days
from diskwatch.units import DAY, day_number

BITE = 200
"""Rows that a bite looks at, at most: under 10 ms of work on a slow core, and a few pages to write."""

_Dated = tuple[int, int, rows.Cell]


def thin(connection: sqlite3.Connection, now: int) -> bool:
    """Take one bite.

    Args:
        connection: within a transaction.
        now: UTC seconds since 1970.

    Returns:
        Whether anything was done, so that there may be more.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    steps: tuple[Callable[[sqlite3.Connection, int], bool], ...] = (_minutes, _fives, _drives)
    return any(step(connection, now) for step in steps)


def _minutes(connection: sqlite3.Connection, now: int) -> bool:
    before = _traffic_horizon(connection, "io_minute", MINUTE_DAYS, now)
    return before is not None and _delete(connection, "io_minute", rows.slot(before, 0, MINUTE))


def _fives(connection: sqlite3.Connection, now: int) -> bool:
    before = _traffic_horizon(connection, "io_five", DETAIL_DAYS, now)
    if before is None:
        return False
    waiting = next(
        (
            day
            for day in sorted(stored_days(connection, "io_five"))
            if connection.execute(
                "SELECT 1 FROM thinned WHERE what = 'condensed' AND number = ?", (day,)
            ).fetchone()
            is None
        ),
        None,
    )
    # What was not condensed yet must not be lost.
    if waiting is not None:
        before = min(before, waiting * DAY)
    return _delete(connection, "io_five", rows.slot(before, 0, FIVE))


def _traffic_horizon(
    connection: sqlite3.Connection, table: Literal["io_minute", "io_five"], days: int, now: int
) -> int | None:
    """Before when traffic goes: so many days with traffic stay, and by the clock; None where all stays."""
    for place, day in enumerate(stored_days(connection, table), start=1):
        if place > days:
            return min((day + 1) * DAY, (day_number(now) - days) * DAY)
    return None


def _delete(connection: sqlite3.Connection, table: Literal["io_minute", "io_five"], before: int) -> bool:
    (last,) = connection.execute(
        f"SELECT max(slot) FROM (SELECT slot FROM {table} WHERE slot < ? ORDER BY slot LIMIT ?)",  # noqa: S608  # one of two names
        (before, BITE),
    ).fetchone()
    if last is None:
        return False
    connection.execute(f"DELETE FROM {table} WHERE slot <= ?", (last,))  # noqa: S608  # likewise
    return True


def _drives(connection: sqlite3.Connection, now: int) -> bool:
    for (drive,) in connection.execute("SELECT number FROM drive ORDER BY number").fetchall():
        before = detail_horizon(connection, drive, now)
        if before is not None and (
            _passes(connection, drive, before)
            or _beside(connection, drive, before)
            or any(_values(connection, *one, before) for one in _moving(connection, drive))
        ):
            return True
    return False


def detail_horizon(connection: sqlite3.Connection, drive: int, now: int) -> int | None:
    """Before when a drive's detail may be thinned: just behind a kept copy of its state; None where not at all.

    Args:
        connection: to the history.
        drive: the drive's number.
        now: UTC seconds since 1970.
    """
    copies = connection.execute(
        "SELECT at FROM kept_state WHERE drive = ? ORDER BY at DESC LIMIT -1 OFFSET ?",
        (drive, DETAIL_COPIES - 1),
    )
    for (at,) in copies:
        if at < now - DETAIL_DAYS * DAY:
            return int(at) + 1
    return None


def _moving(connection: sqlite3.Connection, drive: int) -> list[tuple[int, Daily]]:
    found = connection.execute(
        "SELECT number, signal, kind, unit FROM series WHERE drive = ? ORDER BY number", (drive,)
    ).fetchall()
    kept = [(number, daily(signal, kind, unit)) for number, signal, kind, unit in found]
    return [(number, which) for number, which in kept if which is not None]


def _mark(connection: sqlite3.Connection, what: str, number: int) -> int:
    found = connection.execute(
        "SELECT before FROM thinned WHERE what = ? AND number = ?", (what, number)
    ).fetchone()
    return NOTHING_YET if found is None else int(found[0])


def _set_mark(connection: sqlite3.Connection, what: str, number: int, before: int) -> None:
    connection.execute(
        "INSERT OR REPLACE INTO thinned (what, number, before) VALUES (?, ?, ?)", (what, number, before)
    )


def _values(connection: sqlite3.Connection, series: int, which: Daily, before: int) -> bool:
    """One value a day of a series."""
    mark = _mark(connection, "value", series)
    found, reached = _bite(connection, _VALUES, (series, mark, before))
    surplus = [(series, *row[:2]) for day in _by_day(found) for row in _surplus(day, which)]
    connection.executemany("DELETE FROM value WHERE series = ? AND at = ? AND nth = ?", surplus)
    if found:
        _set_mark(connection, "value", series, reached)
    return bool(found)


def _beside(connection: sqlite3.Connection, drive: int, before: int) -> bool:
    """One row a day of what stands beside the values."""
    mark = _mark(connection, "beside", drive)
    found, reached = _bite(connection, _BESIDE, (drive, mark, before))
    surplus = [(drive, *row[:2]) for day in _by_day(found) for row in _surplus(day, Daily.LAST)]
    connection.executemany("DELETE FROM beside WHERE drive = ? AND at = ? AND nth = ?", surplus)
    if found:
        _set_mark(connection, "beside", drive, reached)
    return bool(found)


_VALUES = "SELECT at, nth, value FROM value WHERE series = ? AND at >= ? AND at < ? ORDER BY at, nth LIMIT ?"
_BESIDE = "SELECT at, nth, NULL FROM beside WHERE drive = ? AND at >= ? AND at < ? ORDER BY at, nth LIMIT ?"


def _bite(connection: sqlite3.Connection, asked: str, place: tuple[int, int, int]) -> tuple[list[_Dated], int]:
    """Rows of a bite, and where the next one begins: behind all, or with a day that may have been cut in two.

    Of a day at most two rows stay. So three are the fewest of which one goes, or which reach into another day;
    with fewer, what one bite left for the next could be the same for ever.
    """
    number, mark, before = place
    # The day in which the copy stands is left whole: what came after the copy is still needed.
    before = before // DAY * DAY
    size = max(BITE, 3)
    found = connection.execute(asked, (number, mark, before, size)).fetchall()
    return found, before if len(found) < size else found[-1][0] // DAY * DAY


def _by_day(found: Iterable[_Dated]) -> Iterable[list[_Dated]]:
    days: dict[int, list[_Dated]] = {}
    for row in found:
        days.setdefault(day_number(row[0]), []).append(row)
    return days.values()


def _surplus(day: list[_Dated], which: Daily) -> list[_Dated]:
    """The rows of one day that do not stand for it."""
    kept = {day[-1][:2]}
    numbers = [(value, at, nth) for at, nth, value in day if isinstance(value, int)]
    if which is Daily.HIGHEST and numbers:
        kept.add(max(numbers)[1:])
    return [row for row in day if row[:2] not in kept]


def _passes(connection: sqlite3.Connection, drive: int, before: int) -> bool:
    """Passes of one outcome in a row become the first of them, and a count a day."""
    mark = counted_before(connection, drive)
    found = connection.execute(
        "SELECT at, nth, outcome FROM pass WHERE drive = ? AND at >= ? AND at < ? ORDER BY at, nth LIMIT ?",
        (drive, mark, before, BITE),
    ).fetchall()
    if not found:
        return False
    # The mark is a second: a bite that ended within one would leave the rest of it uncounted for ever.
    found += connection.execute(
        "SELECT at, nth, outcome FROM pass WHERE drive = ? AND at = ? AND nth > ? ORDER BY nth",
        (drive, *found[-1][:2]),
    ).fetchall()
    earlier = connection.execute(
        "SELECT outcome FROM pass WHERE drive = ? AND at < ? ORDER BY at DESC, nth DESC LIMIT 1", (drive, mark)
    ).fetchone()
    outcome = None if earlier is None else earlier[0]
    surplus = []
    for at, nth, now in found:
        if now == outcome:
            surplus.append((drive, at, nth))
        outcome = now
    count(connection, drive, [(at, str(how)) for at, _, how in found])
    connection.executemany("DELETE FROM pass WHERE drive = ? AND at = ? AND nth = ?", surplus)
    set_counted(connection, drive, found[-1][0] + 1)
    return True
