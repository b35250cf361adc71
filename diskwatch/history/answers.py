"""What smartctl last printed of each drive, word for word.

A ticket carries it as proof. Only the latest is kept. Since every byte that the watch writes is counted, it is
written anew once a day and whenever the call changes.
"""

import sqlite3

from diskwatch.history import packing
from diskwatch.units import day_number


def write_answer(connection: sqlite3.Connection, drive: int, at: int, words: str, call: str | None) -> None:
    """Keep an answer, where one is due.

    Args:
        connection: within a transaction.
        drive: the drive's number.
        at: when it was given, UTC seconds since 1970.
        words: all of it.
        call: the call that stands after it.

    Raises:
        sqlite3.Error: it could not be written; the caller undoes the transaction.
    """
    known = connection.execute("SELECT at, call FROM answer WHERE drive = ?", (drive,)).fetchone()
    if known is None or (day_number(known[0]), known[1]) != (day_number(at), call):
        connection.execute(
            "INSERT OR REPLACE INTO answer (drive, at, call, packed) VALUES (?, ?, ?, ?)",
            (drive, at, call, packing.packed(words)),
        )
