"""A copy of a history in memory, of this process alone, for where its log cannot be read in place.

SQLite wants an index beside the log, and on a full disk there is no room for one. What stands in the log must
not be passed over, so file and log are copied to where there is room and read there.
"""

import os
import shutil
import sqlite3
from contextlib import suppress
from pathlib import Path

_MEMORY = Path("/dev/shm")  # noqa: S108  # a folder of this process alone is made in it
"""Where Linux keeps files in memory (shm_overview(7))."""

_WHOLE = ("", "-wal")
_ROOM = 1.5
"""How much more than the files themselves must be free: nobody else shall want for memory."""


def connect_to_copy(path: Path) -> sqlite3.Connection | None:
    """A connection to a copy of a history and its log, which is gone when it is closed.

    Args:
        path: the history.

    Returns:
        It cannot write; None where there is no room for a copy.

    Raises:
        sqlite3.Error: the copy cannot be read.
        OSError: the history cannot be read.
    """
    files = [path.with_name(path.name + ending) for ending in _WHOLE]
    try:
        if shutil.disk_usage(_MEMORY).free < _ROOM * sum(file.stat().st_size for file in files):
            return None
        folder = _MEMORY / f"diskwatch-{os.getpid()}-{os.urandom(8).hex()}"
        folder.mkdir(mode=0o700)
    except OSError:
        return None
    try:
        for file in files:
            shutil.copyfile(file, folder / file.name)
        uri = (folder / path.name).as_uri() + "?mode=rw"
        connection = sqlite3.connect(uri, uri=True, isolation_level=None, check_same_thread=False)
        try:
            connection.execute("PRAGMA query_only = ON")
            connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
        except BaseException:
            connection.close()
            raise
        return connection
    finally:
        # An open file lasts as long as somebody reads it; by name nobody shall find it.
        with suppress(OSError):
            shutil.rmtree(folder)
