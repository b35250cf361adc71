"""The write-ahead log of a history, folded into its file where no commit has to wait for it.

SQLite folds the log in (a checkpoint) within whatever commit finds a thousand pages in it, and that commit then
waits for the disk twice. Here a connection of its own does it instead: a passive checkpoint takes no lock that
a writer or a reader needs (SQLite, Write-Ahead Logging, 3.1 and 3.2; PRAGMA wal_checkpoint). It syncs the log
before it touches the file, so a power cut meanwhile costs nothing.

The next commit then begins the log anew, if nothing was added meanwhile, and unless a reader still looks at it:
as long as one does, the log grows by what is written, some ten mebibytes a day. No writer can bound that.
"""

import sqlite3
from contextlib import closing
from pathlib import Path

from diskwatch.history.mishaps import told
from diskwatch.history.opening import BUSY_MS

KEPT_BYTES = 4 << 20
"""What a log that once grew is cut back to, bytes.

Its room is written over again and again, since commits to a file that grows cost the disk more. So the file is
longer only where more than this is in the log.
"""

LAST_RESORT_PAGES = 4_000
"""Pages in the log, 16 MiB, at which a commit folds it in after all, where nobody else came to it."""


def leave_to_others(connection: sqlite3.Connection) -> None:
    """Let a writer's commits leave the log to `fold_in`, up to the last resort.

    Raises:
        sqlite3.Error: it cannot be set.
    """
    connection.execute(f"PRAGMA wal_autocheckpoint = {LAST_RESORT_PAGES}")
    connection.execute(f"PRAGMA journal_size_limit = {KEPT_BYTES}")


def grown(path: Path) -> bool:
    """Whether the log beside a history is long enough to be folded in."""
    try:
        return path.with_name(f"{path.name}-wal").stat().st_size > KEPT_BYTES
    except OSError:
        return False  # no log, or none that can be reached: whoever writes next says so


def fold_in(path: Path) -> None:
    """Fold the log into a history that some connection of this process holds open for writing.

    What a reader still needs, or a writer adds meanwhile, is left for the next time.

    Args:
        path: the history.

    Raises:
        HistoryError: its disk is full, it is damaged, or it cannot be written for another reason.
    """
    uri = path.resolve().as_uri() + "?mode=rw"  # without it, one that is gone would be begun anew
    try:
        with closing(sqlite3.connect(uri, uri=True, isolation_level=None, timeout=BUSY_MS / 1000)) as own:
            own.execute(
                "PRAGMA synchronous = FULL"
            )  # less, and the log were not synced before the file is touched
            own.execute("PRAGMA wal_checkpoint(PASSIVE)").fetchall()
    except sqlite3.Error as error:
        raise told(error, path) from error
