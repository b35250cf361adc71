"""How far the kernel's log was read, and what was counted of each drive up to there."""

import sqlite3

from diskwatch.history.round import write_entries
from diskwatch.records import LeftOff, Listened


def write_listened(connection: sqlite3.Connection, listened: Listened) -> None:
    """Keep what was heard, with the place up to which it was.

    Args:
        connection: within a transaction.
        listened: what was heard since it was last kept.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    connection.execute(
        "INSERT OR REPLACE INTO left_off (source, log, sequence, gathered) VALUES (?, ?, ?, ?)",
        (listened.source, listened.left_off.log, listened.left_off.sequence, listened.gathered),
    )
    connection.executemany(
        "INSERT OR REPLACE INTO heard (drive, signal, total) VALUES (?, ?, ?)",
        [
            (drive, signal, total)
            for drive, counts in listened.totals.items()
            for signal, total in counts.items()
        ],
    )
    write_entries(connection, listened.entries)


def left_off(connection: sqlite3.Connection, source: str) -> tuple[LeftOff, str] | None:
    """How far a log was read, and what had been gathered of troubles under way; None for never.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    found = connection.execute(
        "SELECT log, sequence, gathered FROM left_off WHERE source = ?", (source,)
    ).fetchone()
    return None if found is None else (LeftOff(log=found[0], sequence=found[1]), found[2])


def totals(connection: sqlite3.Connection) -> dict[int, dict[str, int]]:
    """What is counted of each drive, by its number and by signal.

    Raises:
        sqlite3.Error: the history cannot be read.
    """
    counts: dict[int, dict[str, int]] = {}
    for drive, signal, total in connection.execute("SELECT drive, signal, total FROM heard"):
        counts.setdefault(drive, {})[signal] = total
    return counts
