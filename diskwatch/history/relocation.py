"""A history moves to another folder: copied exactly, held against the old one row by row, then taken up there.

Nothing is deleted. The old file stays where it was under a dated name, and beside it a pointer
(`diskwatch.places.POINTER`) leads every later command and watch to the new place. The switch is one renaming:
before it the old history is in use, after it the new one, whatever happens in between.
"""

import os
import sqlite3
from collections.abc import Iterator
from contextlib import closing, suppress
from dataclasses import dataclass
from itertools import zip_longest
from pathlib import Path

from diskwatch.errors import HistoryDamaged, HistoryError, UsageError
from diskwatch.history.care import check, give_name, lay_copy
from diskwatch.history.guarding import refuse_odd_database
from diskwatch.history.lock import WatchLock
from diskwatch.history.mishaps import told
from diskwatch.history.opening import open_to_read, refuse_foreign
from diskwatch.history.rescue import aside_name
from diskwatch.language import ngettext
from diskwatch.places import HISTORY, POINTER
from diskwatch.units import plain, say_bytes, say_count

_NOBODY = object()


@dataclass(frozen=True, slots=True, kw_only=True)
class Moved:
    """What became of a history that was moved.

    Attributes:
        source: the folder that it lay in.
        to: the folder that it lies in now.
        aside: where the old file lies, kept.
        size: bytes of the new file.
        rows: rows that were held against each other.
        same_file_system: whether both folders lie in one file system, so that the move saves it from no drive.
    """

    source: Path
    to: Path
    aside: Path
    size: int
    rows: int
    same_file_system: bool

    def sentence(self) -> str:
        """What happened, for the day book and the person."""
        return ngettext(
            "The history was moved from {source} to {to}: {size}, {count} row, held against the old one. The "
            "old file is kept as {aside}.",
            "The history was moved from {source} to {to}: {size}, {count} rows, each held against the old one. "
            "The old file is kept as {aside}.",
            self.rows,
        ).format(
            source=plain(str(self.source)),
            to=plain(str(self.to)),
            size=say_bytes(self.size),
            count=say_count(self.rows),
            aside=plain(self.aside.name),
        )


def move(folder: Path, to: Path, at: int) -> Moved:
    """Move the history of a folder; nobody may be writing it.

    Args:
        folder: where it lies.
        to: the folder to move it to; made where it does not exist.
        at: now, UTC seconds since 1970.

    Raises:
        UsageError: that folder cannot be meant.
        NothingToWorkOn: there is no history yet.
        HistoryHeld: another process writes it.
        HistoryError: it could not be copied, or the copy is not equal; the old one stays in use.
    """
    source, there = folder / HISTORY, _place(folder, to)
    open_to_read(source).close()
    _refuse_read_only(folder)
    refuse_foreign(source)
    lock = WatchLock.take(folder)
    try:
        _make(there)
        refuse_odd_database(there / HISTORY, to_write=True)
        _refuse_taken(there)
        with closing(_Held(WatchLock.take(there))):
            return _moved(folder, there, at)
    except OSError as error:
        raise told(error, there) from error
    finally:
        lock.release()


class _Held:
    def __init__(self, lock: WatchLock) -> None:
        self._lock = lock

    def close(self) -> None:
        self._lock.release()


def _place(folder: Path, to: Path) -> Path:
    if not str(to).strip() or "\n" in str(to):
        raise UsageError("no folder is named that the history could move to", hint="name one on another drive")
    there = Path(os.path.realpath(to))
    if there == Path(os.path.realpath(folder)):
        raise UsageError(f"the history lies in {plain(str(folder))} already", hint="name another folder")
    if there.exists() and not there.is_dir():
        raise UsageError(f"{plain(str(there))} is no folder", hint="name a folder on another drive")
    return there


def _refuse_read_only(folder: Path) -> None:
    """A drive in trouble is often mounted so; then no pointer can be left, and no writer kept out."""
    if os.statvfs(folder).f_flag & os.ST_RDONLY:
        raise HistoryError(
            f"{plain(str(folder))} is mounted read-only, so nothing that leads elsewhere can be left there",
            hint=f"end the watch, copy {HISTORY} (and {HISTORY}-wal, where there is one) to the new folder, "
            "and name that with --state from then on",
        )


def _make(there: Path) -> None:
    if not there.is_dir():
        there.mkdir(parents=True)
        there.chmod(0o755)  # whatever the umask: ordinary users may read


def _refuse_taken(there: Path) -> None:
    if (there / HISTORY).exists():
        raise HistoryError(
            f"there is a history in {plain(str(there))} already; it is left untouched",
            hint="name another folder, or let its drives' past travel by export-history and import-history",
        )


def _moved(folder: Path, there: Path, at: int) -> Moved:
    source, making = folder / HISTORY, there / f".{HISTORY}.making"
    _fold(source)
    try:
        making.unlink(missing_ok=True)
        lay_copy(source, making, lambda: False)
        looked = check(making, thorough=True, stop=lambda: False)
        if looked.damage:
            raise HistoryDamaged(
                f"{plain(str(source))} is damaged: {looked.damage[0]}",
                hint="the watch mends it when it starts",
            )
        rows = _equal_rows(source, making)
        aside = aside_name(folder, "moved", at)
        _point(folder, there)
        try:
            give_name(making, there / HISTORY)
            _put_aside(source, aside)
        except BaseException:
            if source.exists():
                (folder / POINTER).unlink(missing_ok=True)
            raise
    finally:
        with suppress(OSError):
            making.unlink(missing_ok=True)
    with suppress(OSError):
        (there / POINTER).unlink(missing_ok=True)  # it lay there before, and has come back
    return Moved(
        source=folder,
        to=there,
        aside=aside,
        size=(there / HISTORY).stat().st_size,
        rows=rows,
        same_file_system=folder.stat().st_dev == there.stat().st_dev,
    )


def _fold(source: Path) -> None:
    """Fold the log into the file, so that the one file that is kept aside is whole by itself."""
    try:
        with closing(sqlite3.connect(source, isolation_level=None)) as connection:
            connection.execute("PRAGMA wal_checkpoint(TRUNCATE)").fetchall()
    except sqlite3.Error as error:
        raise told(error, source) from error


def _equal_rows(source: Path, copy: Path) -> int:
    """Hold two histories against each other.

    Returns:
        How many rows each has.

    Raises:
        HistoryError: they differ.
    """
    rows = 0
    try:
        with closing(_reading(source)) as old, closing(_reading(copy)) as new:
            for one, other in zip_longest(_all(old), _all(new), fillvalue=_NOBODY):
                if one != other:
                    raise HistoryError(
                        f"the copy {plain(str(copy))} is not equal to the history",
                        hint="the old one stays in use",
                    )
                rows += 1
    except sqlite3.Error as error:
        raise told(error, source) from error
    return rows


def _reading(path: Path) -> sqlite3.Connection:
    return sqlite3.connect(path.resolve().as_uri() + "?mode=ro", uri=True, isolation_level=None)


def _all(connection: sqlite3.Connection) -> Iterator[tuple[object, ...]]:
    tables = connection.execute(
        "SELECT name, sql FROM sqlite_master WHERE type = 'table' ORDER BY name"
    ).fetchall()
    for name, sql in tables:
        yield name, sql
        # The name is one of our own schema; a quotation mark in it would be doubled all the same.
        quoted = str(name).replace('"', '""')
        yield from connection.execute(f'SELECT * FROM "{quoted}"')  # noqa: S608


def _point(folder: Path, there: Path) -> None:
    pointer, making = folder / POINTER, folder / f".{POINTER}.making"
    making.unlink(missing_ok=True)
    descriptor = os.open(making, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC, 0o644)
    with os.fdopen(descriptor, "wb") as file:
        os.fchmod(descriptor, 0o644)  # whatever the umask: ordinary users must be led there too
        file.write(os.fsencode(there) + b"\n")
        file.flush()
        os.fsync(descriptor)
    making.replace(pointer)


def _put_aside(source: Path, aside: Path) -> None:
    """The switch: as long as the old file has its name, no pointer is followed."""
    log = source.with_name(f"{source.name}-wal")
    source.rename(aside)
    # A reader that was open now may have kept the log; what stands in one belongs to the old file.
    with suppress(OSError):
        if log.stat().st_size:
            log.rename(aside.with_name(f"{aside.name}-wal"))
        else:
            log.unlink()
    with suppress(OSError):
        source.with_name(f"{source.name}-shm").unlink()
    descriptor = os.open(source.parent, os.O_RDONLY | os.O_CLOEXEC)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
