"""A damaged history: set aside under a dated name, what can be read carried over, a new one begun.

Nothing is deleted: the damaged file stays beside the new one until its owner takes it away. What cannot be read
from it is looked for in the newest copies.
"""

import os
import sqlite3
from collections.abc import Mapping
from contextlib import closing, suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import BinaryIO

from diskwatch.errors import HistoryError, HistoryTooNew
from diskwatch.history import versions
from diskwatch.history.beginning import begun
from diskwatch.history.care import copies
from diskwatch.history.carrying import Carried, carry, let_go_of_orphans, tables_of
from diskwatch.history.lock import WatchLock
from diskwatch.history.mishaps import foreign, told
from diskwatch.history.opening import is_ours
from diskwatch.history.round import write_entries
from diskwatch.places import HISTORY
from diskwatch.records import Entry
from diskwatch.units import plain, say_count

_HEADER = b"SQLite format 3\0" + bytes((0x10, 0x00, 2, 2, 0, 64, 32, 32))
"""How our files begin: pages of 4,096 bytes, write-ahead log (SQLite, Database File Format, 1.3)."""

_NOTHING = Carried(rows={}, gaps={"everything": 1})


@dataclass(frozen=True, slots=True, kw_only=True)
class Rescued:
    """What became of a damaged history.

    Attributes:
        aside: where the damaged file lies now.
        carried: rows carried over from it, by table.
        gaps: places that could not be read, by table; how many rows stood there is not known.
        from_copies: rows that only an older copy still had.
        orphans: rows left out because what they belong to is lost.
    """

    aside: Path
    carried: Mapping[str, int]
    gaps: Mapping[str, int]
    from_copies: int
    orphans: int

    def sentence(self) -> str:
        """What happened, for the day book."""
        lost = [f"{table} ({count} place{'s' if count > 1 else ''})" for table, count in self.gaps.items()]
        told_lost = (
            f"Could not be read: {', '.join(lost)}. " if lost else "All tables could be read to their end. "
        )
        filled = f"{say_count(self.from_copies)} rows came from older copies. " if self.from_copies else ""
        left = f"{say_count(self.orphans)} rows belonged to what is lost. " if self.orphans else ""
        rows = say_count(sum(self.carried.values()))
        return (
            f"The history was damaged and a new one was begun; {rows} rows were carried over."
            f" {told_lost}{filled}{left}The damaged file is kept as {plain(self.aside.name)}."
        )


def rescue(folder: Path, at: int) -> Rescued:
    """Set a damaged history aside and begin a new one with all that can be read.

    Args:
        folder: the state folder.
        at: now, UTC seconds since 1970.

    Raises:
        HistoryHeld: another process writes it.
        HistoryTooNew: a newer version wrote it; it is left untouched.
        HistoryError: the new one cannot be made, or nothing says that the file is ours; it stays where it was.
    """
    path, making = folder / HISTORY, folder / f".{HISTORY}.making"
    # Before a lock lies beside it, which would say that it is.
    if not is_ours(path):
        raise foreign(path)
    lock = WatchLock.take(folder)
    mended = folder / f".{HISTORY}.mended"
    try:
        for left in (making, mended):
            _remove(left)
        source = _with_a_header(path, mended)
        found = _carried_over(source, making, folder)
        aside = aside_name(folder, "damaged", at)
        rescued = Rescued(
            aside=aside,
            carried=found.first.rows,
            gaps=found.first.gaps,
            from_copies=found.from_copies,
            orphans=found.orphans,
        )
        _note(making, rescued, at)
        _swap(path, making, aside)
        return rescued
    except OSError as error:
        raise told(error, path) from error
    finally:
        for left in (making, mended):
            with suppress(OSError):
                _remove(left)
        lock.release()


def _remove(path: Path) -> None:
    for name in (path.name, f"{path.name}-wal", f"{path.name}-shm", f"{path.name}-journal"):
        path.with_name(name).unlink(missing_ok=True)


def _with_a_header(path: Path, mended: Path) -> Path:
    """The file itself or, where even its first bytes are damaged, a copy with the ones that ours have."""
    with path.open("rb") as file:
        if file.read(len(_HEADER)) == _HEADER:
            return path
        file.seek(0)
        with mended.open("wb") as copy:
            _pour(file, copy)
            copy.seek(0)
            copy.write(_HEADER)
    log = path.with_name(f"{path.name}-wal")
    if log.exists():
        with log.open("rb") as file, mended.with_name(f"{mended.name}-wal").open("wb") as copy:
            _pour(file, copy)
    return mended


def _pour(file: BinaryIO, copy: BinaryIO) -> None:
    # By the mebibyte: a log that a reader held up may be larger than the memory that the watch may use.
    while chunk := file.read(1 << 20):
        copy.write(chunk)


@dataclass(frozen=True, slots=True)
class _Found:
    first: Carried
    from_copies: int
    orphans: int


def _carried_over(source: Path, making: Path, folder: Path) -> _Found:
    try:
        with closing(begun(making)) as db:
            db.conn.execute("PRAGMA foreign_keys = OFF")
            first = _from(source, db.conn)
            filled = 0
            if first.gaps:
                filled = sum(sum(_from(copy, db.conn).rows.values()) for _, copy in copies(folder))
            with db.atomic():
                return _Found(first, filled, let_go_of_orphans(db.conn))
    except sqlite3.Error as error:
        raise told(error, making) from error


def _from(source: Path, new: sqlite3.Connection) -> Carried:
    # Read-only, so that closing it does not fold its log into the damaged file.
    alone = not source.with_name(f"{source.name}-wal").exists()
    uri = source.resolve().as_uri() + ("?mode=ro&immutable=1" if alone else "?mode=ro")
    try:
        old = sqlite3.connect(uri, uri=True, isolation_level=None)
    except sqlite3.Error:
        return _NOTHING
    with closing(old):
        try:
            tables_of(old)
            _refuse_newer(old, source)
        except sqlite3.Error:
            return _NOTHING
        return carry(old, new)


def _refuse_newer(old: sqlite3.Connection, source: Path) -> None:
    try:
        versions.age(old, source)
    except HistoryTooNew:
        raise
    except HistoryError:
        return  # that the list of its steps is lost is a part of the damage


def aside_name(folder: Path, why: str, at: int) -> Path:
    """A free name for a history that is kept aside.

    Args:
        folder: where.
        why: one word of why, for its name.
        at: when, UTC seconds since 1970, for its name too.
    """
    when = datetime.fromtimestamp(at, UTC).strftime("%Y-%m-%dT%H%M%SZ")
    number, name = 1, f"history-{why}-{when}.db"
    while (folder / name).exists():
        number += 1
        name = f"history-{why}-{when}-{number}.db"
    return folder / name


def _note(making: Path, rescued: Rescued, at: int) -> None:
    data = {"aside": rescued.aside.name, "carried": dict(rescued.carried), "gaps": dict(rescued.gaps)}
    entry = Entry(at=at, drive=None, kind="trouble", text=rescued.sentence(), data=data)
    try:
        with closing(begun(making)) as db, db.atomic():
            write_entries(db.conn, [entry])
    except sqlite3.Error as error:
        raise told(error, making) from error


def _swap(path: Path, making: Path, aside: Path) -> None:
    """Let the new file take the old one's name; at no moment is there none of that name."""
    try:
        os.link(path, aside)
    except OSError:  # some file systems know no second name for a file
        path.rename(aside)
    log = path.with_name(f"{path.name}-wal")
    if log.exists():
        # Its log must not be taken for the new file's.
        log.rename(aside.with_name(f"{aside.name}-wal"))
    path.with_name(f"{path.name}-shm").unlink(missing_ok=True)
    making.chmod(0o644)
    making.replace(path)
    descriptor = os.open(path.parent, os.O_RDONLY | os.O_CLOEXEC)
    try:
        os.fsync(descriptor)
    finally:
        os.close(descriptor)
