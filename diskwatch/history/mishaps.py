"""What SQLite and the system report, turned into one clear sentence that names the file."""

import errno
import sqlite3
from pathlib import Path

from diskwatch.errors import HistoryDamaged, HistoryError, HistoryGarbled, HistoryGone, HistoryUnfit
from diskwatch.units import plain

_WORDS: dict[int, tuple[str, str | None]] = {
    sqlite3.SQLITE_FULL: (
        "cannot be written: the disk that holds it is full",
        "free some space; what was stored before is kept",
    ),
    sqlite3.SQLITE_READONLY: (
        "cannot be written: it or its folder is read-only for this user",
        "run as the user that owns it, or name another folder with --state",
    ),
    sqlite3.SQLITE_BUSY: ("is locked by another process", "try again when that process has ended"),
    sqlite3.SQLITE_LOCKED: ("is locked by another process", "try again when that process has ended"),
    sqlite3.SQLITE_CORRUPT: (
        "is damaged",
        "the watch sets it aside and carries over what can be read",
    ),
    sqlite3.SQLITE_NOTADB: (
        "is damaged: its beginning is not that of an SQLite database",
        "the watch sets it aside and carries over what can be read",
    ),
    sqlite3.SQLITE_CANTOPEN: (
        "cannot be opened: it, its folder or a file beside it does not let this user in",
        "run as the user that owns it, or name another folder with --state",
    ),
    sqlite3.SQLITE_PERM: ("cannot be opened: this user has no right to", "run as the user that owns it"),
    sqlite3.SQLITE_IOERR: (
        "cannot be used: the disk that holds it reports an error or has no space left",
        "look at that disk first",
    ),
}
_UNFIT = (
    "does not take in what was to be written: {why}",
    "nothing of it was written, and what was stored before is kept",
)
_WHY_UNFIT = {
    sqlite3.SQLITE_CONSTRAINT_FOREIGNKEY: "it speaks of a drive that is not in the history",
    sqlite3.SQLITE_CONSTRAINT_PRIMARYKEY: "there is such a row already",
    sqlite3.SQLITE_CONSTRAINT_UNIQUE: "there is such a row already",
    sqlite3.SQLITE_CONSTRAINT_NOTNULL: "a value that must be there is missing",
}
_DAMAGED = frozenset({sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB})
_READ_ONLY_SYSTEM = (
    "cannot be written: its file system is mounted read-only",
    "find out why, for a disk in trouble is mounted so too, or name another folder with --state",
)
_ERRNO_CODES = {
    errno.ENOSPC: sqlite3.SQLITE_FULL,
    errno.EDQUOT: sqlite3.SQLITE_FULL,
    errno.EACCES: sqlite3.SQLITE_CANTOPEN,
    errno.EPERM: sqlite3.SQLITE_CANTOPEN,
    errno.EIO: sqlite3.SQLITE_IOERR,
}


def primary(error: sqlite3.Error) -> int | None:
    """SQLite's primary result code of an error; None where Python's own layer raised it."""
    code = getattr(error, "sqlite_errorcode", None)
    return None if code is None else int(code) & 0xFF


def told(error: sqlite3.Error | OSError, path: Path | None) -> HistoryError:
    """An error of SQLite or the system as one of ours.

    Args:
        error: what was raised.
        path: the file or folder that was being used; None for a history in memory.
    """
    name = "the history in memory" if path is None else plain(str(path))
    if isinstance(error, OSError) and error.errno == errno.EROFS:
        return HistoryError(f"{name} {_READ_ONLY_SYSTEM[0]}", hint=_READ_ONLY_SYSTEM[1])
    code = _ERRNO_CODES.get(error.errno or 0) if isinstance(error, OSError) else primary(error)
    if code in _WORDS:
        what, hint = _WORDS[code]
        kind = HistoryDamaged if code in _DAMAGED else HistoryError
        return kind(f"{name} {what}", hint=hint)
    if code == sqlite3.SQLITE_CONSTRAINT:
        return HistoryUnfit(f"{name} {_UNFIT[0].format(why=why_unfit(error))}", hint=_UNFIT[1])
    detail = error.strerror if isinstance(error, OSError) else str(error)
    return HistoryError(f"{name} cannot be used: {plain(str(detail))}")


def why_unfit(error: Exception) -> str:
    """Why a row does not fit a table, by SQLite's error; a part of a sentence."""
    return _WHY_UNFIT.get(getattr(error, "sqlite_errorcode", 0), "a value is of the wrong kind")


def no_database(path: Path) -> HistoryError:
    """The error for a file that is not even the beginning of a database."""
    what, hint = _WORDS[sqlite3.SQLITE_NOTADB]
    return HistoryDamaged(f"{plain(str(path))} {what}", hint=hint)


def foreign(path: Path) -> HistoryError:
    """The error for a file of which nothing says that it is ours: it may be all that somebody has."""
    return HistoryError(
        f"{plain(str(path))} is no history of diskwatch, as far as can be told from it; it is left untouched",
        hint="move it away, or name another folder with --state",
    )


def taken_away(path: Path) -> HistoryError:
    """The error for a file that was moved, deleted or replaced while it was being written."""
    return HistoryGone(
        f"{plain(str(path))} was moved or deleted while it was being written; nothing more goes into it",
        hint="the watch takes up what is there now, or begins anew",
    )


def unreadable(path: Path | None, error: ValueError | None = None) -> HistoryError:
    """The error for a history whose file is sound but whose contents make no sense.

    Args:
        path: the history; None for one in memory.
        error: what is wrong with which value, where that is known.
    """
    name = "the history in memory" if path is None else plain(str(path))
    why = "" if error is None else f" ({plain(str(error))})"
    return HistoryGarbled(
        f"{name} is damaged: it holds a value that cannot be right{why}",
        hint="the watch takes such values out and says so; where none runs, run 'diskwatch watch --once'",
    )
