"""Which versions of the history this program can read and write; needs nothing but the standard library.

It stands apart from the schema so that a reader can ask it without loading what only the writer needs.
"""

import sqlite3
from enum import Enum, auto
from pathlib import Path

from diskwatch.errors import HistoryError, HistoryTooNew
from diskwatch.units import plain

MIGRATION_SET = "diskwatch"
MIGRATIONS = (
    "0001_base",
    "0002_ten_years",
    "0003_every_pass",
    "0004_in_order",
    "0005_ways",
    "0006_answer",
    "0007_listening",
    "0008_trends",
    "0009_probe",
)
"""Names of all steps of the schema, oldest first; a step is never renamed, changed or taken out."""

APPLICATION_ID = int.from_bytes(b"dskw", "big")
"""What stands at byte 68 of our files and tells that they are ours (SQLite, Database File Format, 1.3.17)."""

_STEPS_TABLE = "_sqlite_migrations"


class Age(Enum):
    """How a history compares with this program.

    EMPTY holds nothing yet; OLDER lacks steps that the writer applies when it opens it; CURRENT has them all.
    """

    EMPTY = auto()
    OLDER = auto()
    CURRENT = auto()


def age(connection: sqlite3.Connection, path: Path) -> Age:
    """Compare a history with this program; reads only.

    Args:
        connection: an open connection to it.
        path: where it lies, for the error's text.

    Raises:
        HistoryTooNew: a newer version wrote it.
        HistoryError: it is a database of something else.
        sqlite3.Error: it cannot be read.
    """
    tables = _tables(connection)
    applied = steps_of(connection)
    (version,) = connection.execute("PRAGMA user_version").fetchone()
    if applied - set(MIGRATIONS) or (applied and version > len(MIGRATIONS)):
        raise HistoryTooNew(
            f"{plain(str(path))} was written by a newer version of diskwatch and is left untouched",
            hint="use that version, or name another folder with --state",
        )
    if not applied:
        (whose,) = connection.execute("PRAGMA application_id").fetchone()
        if (
            version
            or whose
            or not {name for name in tables if not name.startswith("sqlite_")} <= {_STEPS_TABLE}
        ):
            raise HistoryError(
                f"{plain(str(path))} is a database, but no history of diskwatch; it is left untouched",
                hint="move it away, or name another folder with --state",
            )
        return Age.EMPTY
    return Age.CURRENT if applied == set(MIGRATIONS) else Age.OLDER


def steps_of(connection: sqlite3.Connection) -> frozenset[str]:
    """Names of the steps that a history has taken; none where it is none of ours.

    Raises:
        sqlite3.Error: it cannot be read.
    """
    if _STEPS_TABLE not in _tables(connection):
        return frozenset()
    taken = connection.execute("SELECT name FROM _sqlite_migrations WHERE migration_set = ?", (MIGRATION_SET,))
    return frozenset(name for (name,) in taken)


def _tables(connection: sqlite3.Connection) -> frozenset[str]:
    found = connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")
    return frozenset(name for (name,) in found)
