"""Opening a history to read it, so that nothing of it is created or changed.

A history in WAL mode is read in one of two ways. While a write-ahead log lies beside it, SQLite must be let see
that log: an ordinary connection with ``mode=ro``. Without one nobody is writing, and an ordinary user, or a
read-only disk, could not even create the index that SQLite wants beside the log: then ``immutable=1`` reads the
file alone. That is right only as long as the file stays as it is, so whoever reads this way asks `Opened.holds`
before and after. Where the disk is too full for the index beside a log, file and log are copied into memory.
"""

import os
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from diskwatch.errors import HistoryDamaged, HistoryError, NothingToWorkOn
from diskwatch.history import versions
from diskwatch.history.guarding import refuse_odd_database
from diskwatch.history.mishaps import foreign, no_database, primary, told
from diskwatch.history.older import read_as_current
from diskwatch.history.versions import APPLICATION_ID
from diskwatch.places import POINTER, WATCH_LOCK, WRITE_LOCK, moved_to
from diskwatch.units import plain

BUSY_MS = 5_000
"""How long a lock is waited for, milliseconds."""

_MAGIC = b"SQLite format 3\0"
_SMALLEST_PAGE = 512
"""How every database begins, and the least bytes that one has (SQLite, Database File Format, 1.3)."""

_ID_AT = 68
"""Where the application id stands, four bytes, the largest first (likewise, 1.3.17)."""

_NO_ROOM = frozenset({sqlite3.SQLITE_IOERR, sqlite3.SQLITE_FULL})
_NO_WAY_IN = frozenset({sqlite3.SQLITE_CANTOPEN, sqlite3.SQLITE_READONLY}) | _NO_ROOM
"""What keeps SQLite from laying its index beside the log: no right to, or a full disk."""


@dataclass(frozen=True, slots=True)
class _Mark:
    """What tells whether a file was written or replaced: device, inode, time of change and size; its logs."""

    file: tuple[int, int]
    changed: tuple[int, int]
    log: int | None
    journal: int | None

    @property
    def empty(self) -> bool:
        """Whether nothing was ever written; with a log beside it, an empty file is a damaged one."""
        return self.changed[1] == 0 and not self.log


def _size(path: Path) -> int | None:
    try:
        return path.lstat().st_size
    except FileNotFoundError:
        return None


def _mark(path: Path) -> _Mark:
    # The logs are looked at first: one that appears in between is then met by the next look, never missed.
    log = _size(path.with_name(path.name + "-wal"))
    journal = _size(path.with_name(path.name + "-journal"))
    about = path.lstat()
    return _Mark(
        file=(about.st_dev, about.st_ino),
        changed=(about.st_mtime_ns, about.st_size),
        log=log,
        journal=journal,
    )


class Opened:
    """A history open for reading; good for any thread, one at a time.

    Attributes:
        connection: the connection; it cannot write.
        frozen: True where it reads the file alone, without any log.
        version: for a file of an older version, which one that is; its answers are right until the watch
            brings the file up to date. None for a file of this version.
    """

    def __init__(self, path: Path, connection: sqlite3.Connection, mark: _Mark, *, frozen: bool) -> None:
        self.connection = connection
        self.frozen = frozen
        self.version: int | None = None
        self._path = path
        self._mark = mark

    @property
    def lasting(self) -> bool:
        """Whether its answers are right however the file is written meanwhile; else `holds` must be asked."""
        return not self.frozen and self.version is None

    def holds(self) -> bool:
        """Whether what this connection gives is still what the file says."""
        try:
            now = _mark(self._path)
            if self.version is not None and not self.frozen and _version(self.connection) != self.version:
                return False
        except (OSError, sqlite3.Error):
            return False
        return now == self._mark if self.frozen else now.file == self._mark.file

    def close(self) -> None:
        """Let go of the file."""
        self.connection.close()


def open_to_read(path: Path) -> Opened:
    """Open a history to read.

    Raises:
        NothingToWorkOn: there is none yet, or nothing in it.
        HistoryTooNew: a newer version wrote it.
        HistoryError: it cannot be read, or is no plain file.
    """
    refuse_odd_database(path, to_write=False)
    try:
        mark = _mark(path)
    except FileNotFoundError:
        _refuse_moved(path)
        raise _nothing_yet(path) from None
    except OSError as error:
        raise told(error, path) from error
    if mark.empty:
        raise _nothing_yet(path)
    opened = _connected(path, mark)
    try:
        _refuse_unreadable(opened, path)
    except BaseException:
        opened.close()
        raise
    return opened


def _refuse_unreadable(opened: Opened, path: Path) -> None:
    with _told(path):
        found = versions.age(opened.connection, path)
    if found is versions.Age.EMPTY:
        raise _nothing_yet(path)
    if found is versions.Age.OLDER:
        with _told(path):
            # First, so that a step that is taken meanwhile is noticed by `holds`.
            opened.version = _version(opened.connection)
            readable = read_as_current(opened.connection)
        if not readable:
            raise HistoryError(
                f"{plain(str(path))} was written by an older version of diskwatch",
                hint="the watch brings it up to date when it starts, or run 'diskwatch watch --once'",
            )


def _version(connection: sqlite3.Connection) -> int:
    (found,) = connection.execute("PRAGMA main.user_version").fetchone()
    return int(found)


def refuse_foreign(path: Path) -> None:
    """Refuse a file that is not ours to write, before anything touches it.

    Raises:
        HistoryTooNew: a newer version wrote it.
        HistoryError: it is no history of diskwatch, or damaged, or cannot be read, or it is somebody else's.
    """
    refuse_odd_database(path, to_write=True)
    try:
        mark = _mark(path)
    except FileNotFoundError:
        _refuse_moved(path)
        return
    except OSError as error:
        raise told(error, path) from error
    if mark.empty:
        return  # a start that was cut short before its first step: nothing stands in it
    opened = _connected(path, mark)
    try:
        with _told(path):
            versions.age(opened.connection, path)
    finally:
        opened.close()


def is_ours(path: Path) -> bool:
    """Whether anything says that a file, damaged as it may be, is a history of diskwatch.

    Its first bytes may, by the application id, or a lock file beside it, which only a watch of ours lays.
    """
    try:
        begin = _beginning(path)
    except OSError:
        begin = b""
    if begin[_ID_AT : _ID_AT + 4] == APPLICATION_ID.to_bytes(4, "big"):
        return True
    return any(_size(path.with_name(name)) is not None for name in (WRITE_LOCK, WATCH_LOCK))


def _beginning(path: Path) -> bytes:
    # Whatever took its place since it was looked at, nothing is followed and nothing waited for.
    descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
    with os.fdopen(descriptor, "rb") as file:
        return file.read(_SMALLEST_PAGE)


def _refuse_moved(path: Path) -> None:
    """Where a history was moved away from, none must be begun in its place as if it had never been."""
    there = moved_to(path.parent)
    if there is not None:
        here, pointer = plain(str(path.parent)), plain(str(path.parent / POINTER))
        raise HistoryError(
            f"the history of {here} was moved to {plain(str(there))}, and is not found there",
            hint=f"mount the drive that it lies on; or, to begin anew here, take {pointer} away",
        )


def _nothing_yet(path: Path) -> NothingToWorkOn:
    return NothingToWorkOn(
        f"nothing has been recorded in {plain(str(path.parent))} yet",
        hint="start the watch, or run 'diskwatch watch --once' to read the drives once",
    )


def _refuse_no_database(path: Path) -> None:
    """SQLite takes a file of less than its smallest page for an empty database, and would write over it."""
    try:
        begin = _beginning(path)
    except OSError as error:
        raise told(error, path) from error
    # The two bytes behind the page size say who may write and read: 1 or 2, or what was written is damaged.
    if len(begin) < _SMALLEST_PAGE or not begin.startswith(_MAGIC) or not {*begin[18:20]} <= {1, 2}:
        raise _of_whom(no_database(path), path)


def _connected(path: Path, mark: _Mark) -> Opened:
    _refuse_no_database(path)
    if mark.log is None and mark.journal is None:
        return _connect(path, mark, frozen=True)
    try:
        return _connect(path, mark, frozen=False)
    except HistoryError as error:
        cause = error.__cause__
        code = primary(cause) if isinstance(cause, sqlite3.Error) else None
        # An empty log hides nothing; a log with something in it must never be passed over in silence.
        if not mark.log and not mark.journal and code in _NO_WAY_IN:
            return _connect(path, mark, frozen=True)
        if not mark.journal and code in _NO_ROOM:
            copy = _copied(path, mark)
            if copy is not None:
                return copy
        raise


def _copied(path: Path, mark: _Mark) -> Opened | None:
    """A copy in memory; None where there is no room for it either, or somebody wrote meanwhile."""
    # A command that reads in place, as all do otherwise, need not load what it takes.
    from diskwatch.history.private import connect_to_copy  # noqa: PLC0415  # see above

    with _told(path):
        try:
            connection = connect_to_copy(path)
        except OSError as error:
            raise told(error, path) from error
        if connection is None or _mark(path) == mark:
            return None if connection is None else Opened(path, connection, mark, frozen=True)
        connection.close()
        return None


def _connect(path: Path, mark: _Mark, *, frozen: bool) -> Opened:
    uri = (path.parent.resolve() / path.name).as_uri() + ("?immutable=1" if frozen else "?mode=ro")
    with _told(path):
        connection = sqlite3.connect(
            uri, uri=True, isolation_level=None, check_same_thread=False, timeout=BUSY_MS / 1000
        )
        try:
            connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
        except BaseException:
            connection.close()
            raise
    return Opened(path, connection, mark, frozen=frozen)


@contextmanager
def _told(path: Path) -> Iterator[None]:
    try:
        yield
    except sqlite3.Error as error:
        raise _of_whom(told(error, path), path) from error


def _of_whom(error: HistoryError, path: Path) -> HistoryError:
    """Damage is only ours to mend where the file is ours."""
    return foreign(path) if isinstance(error, HistoryDamaged) and not is_ours(path) else error
