"""How drives behind USB adapters are reached: kept for the next start, for the machine and not for a drive."""

import sqlite3
from collections.abc import Iterable

from diskwatch.history import rows
from diskwatch.records import Way


def write_ways(connection: sqlite3.Connection, ways: Iterable[Way], at: int) -> None:
    """Keep what was found out last of each adapter.

    Args:
        connection: within a transaction.
        ways: one an adapter.
        at: when it was found out, UTC seconds since 1970.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    connection.executemany(
        "INSERT OR REPLACE INTO way (adapter, instance, type, at) VALUES (?, ?, ?, ?)",
        [(rows.text(one.adapter), rows.text(one.instance), one.type, at) for one in ways],
    )


def ways(connection: sqlite3.Connection) -> tuple[Way, ...]:
    """All that was found out, one an adapter.

    Raises:
        sqlite3.Error: it cannot be read.
    """
    found = connection.execute("SELECT adapter, instance, type FROM way ORDER BY adapter")
    return tuple(Way(adapter=adapter, instance=instance, type=type_) for adapter, instance, type_ in found)
