"""A history begun, or taken up: its folder, its file, its schema, and how the writer's connection behaves."""

import os
import sqlite3
from pathlib import Path

from diskwatch.history.folding import leave_to_others
from diskwatch.history.holding import Holding, Plain
from diskwatch.history.mishaps import told
from diskwatch.history.opening import BUSY_MS
from diskwatch.history.versions import MIGRATIONS, steps_of


def make_folder(folder: Path) -> None:
    """Make the folder of a history where there is none.

    Raises:
        HistoryError: it cannot be made.
    """
    try:
        if not folder.is_dir():
            folder.mkdir(parents=True)
            folder.chmod(0o755)  # whatever the umask: ordinary users may read
    except OSError as error:
        raise told(error, folder) from error


def make_file(path: Path) -> None:
    """Make the empty file of a history where there is none; others may read it.

    Raises:
        HistoryError: it cannot be made.
    """
    try:
        descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, 0o644)
    except FileExistsError:
        return
    except OSError as error:
        raise told(error, path) from error
    # SQLite gives the files that it lays beside the history the same rights.
    os.fchmod(descriptor, 0o644)
    os.close(descriptor)


def begun(path: Path) -> Holding:
    """A history of this version at a path, made where there is none; whoever calls holds the lock.

    Raises:
        HistoryError: it cannot be made.
    """
    try:
        connection = sqlite3.connect(path, check_same_thread=False, timeout=BUSY_MS / 1000)
    except sqlite3.Error as error:
        raise told(error, path) from error
    return prepared(connection, path)


def prepared(connection: sqlite3.Connection, path: Path | None) -> Holding:
    """A connection as the writer uses it, brought up to date; it is closed where that fails.

    Args:
        connection: to the file.
        path: the file; None for a history in memory.

    Raises:
        HistoryTooNew: a newer version wrote it.
        HistoryError: it cannot be written, or is damaged.
    """
    try:
        # FULL: a reading that was reported as stored must outlive a power cut.
        connection.execute("PRAGMA synchronous = FULL")
        connection.execute("PRAGMA foreign_keys = ON")
        # Some builds overwrite with zeros what is thinned away, and that costs the disk twice.
        connection.execute("PRAGMA secure_delete = OFF")
        connection.execute("PRAGMA journal_mode = WAL")
        leave_to_others(connection)
        return Plain(connection) if steps_of(connection) == set(MIGRATIONS) else _brought(connection)
    except sqlite3.Error as error:
        connection.close()
        raise told(error, path) from error
    except BaseException:
        connection.close()
        raise


def _brought(connection: sqlite3.Connection) -> Holding:
    """A connection to a history that lacks steps, which it takes."""
    # Several megabytes, which a history that is up to date need not cost for as long as it is watched.
    from diskwatch.history.library import Database  # noqa: PLC0415 - see above
    from diskwatch.history.schema import bring_up_to_date  # noqa: PLC0415 - see above

    db = Database(connection, execute_plugins=False)
    bring_up_to_date(db)
    return db
