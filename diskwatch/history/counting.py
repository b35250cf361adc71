"""Passes counted by day: what is left of those that were thinned, so that exposure stays exact.

Everything of a drive before its mark is counted; what stands behind the mark is counted when it is asked for.
"""

import sqlite3
from collections.abc import Iterable

from diskwatch.units import day_number

NOTHING_YET = -(2**63)
"""The mark of a drive of which nothing was counted."""


def counted_before(connection: sqlite3.Connection, drive: int) -> int:
    """Before when all of a drive's passes are counted, UTC seconds since 1970.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    found = connection.execute(
        "SELECT before FROM thinned WHERE what = 'pass' AND number = ?", (drive,)
    ).fetchone()
    return NOTHING_YET if found is None else int(found[0])


def count(connection: sqlite3.Connection, drive: int, passes: Iterable[tuple[int, str]]) -> None:
    """Count passes into their days.

    Args:
        connection: within a transaction.
        drive: the drive's number.
        passes: time, UTC seconds since 1970, and outcome of each.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    connection.executemany(
        "INSERT INTO pass_day (drive, day, outcome, passes, first, last) VALUES (?, ?, ?, 1, ?, ?)"
        " ON CONFLICT (drive, day, outcome) DO UPDATE SET passes = passes + 1,"
        " first = min(first, excluded.first), last = max(last, excluded.last)",
        [(drive, day_number(at), outcome, at, at) for at, outcome in passes],
    )


def set_counted(connection: sqlite3.Connection, drive: int, before: int) -> None:
    """Move the mark of a drive, UTC seconds since 1970.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    connection.execute(
        "INSERT OR REPLACE INTO thinned (what, number, before) VALUES ('pass', ?, ?)", (drive, before)
    )
