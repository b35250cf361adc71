"""Care for the file: looks for damage, and lays copies beside it.

Both read through a connection of their own, so that they hold up neither the writer nor a reader, and both end
early when they are told to. They are for whoever may write the history: others could meet a writer that begins.
"""

import os
import re
import sqlite3
import time
from collections.abc import Callable, Iterator
from contextlib import closing, contextmanager, suppress
from dataclasses import dataclass
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Literal

from diskwatch.errors import HistoryDamaged
from diskwatch.history.mishaps import primary, told
from diskwatch.history.opening import BUSY_MS
from diskwatch.places import HISTORY
from diskwatch.units import plain

COPIES = 2
"""Copies that are kept; older ones go when a new one is whole."""

_MOST_NAMED = 20
_PAGES = 256
_PAUSE = 0.02
"""A copy is made by the mebibyte, with a breath in between: the disk has other work."""

_STEPS = 100_000
_OF_THE_COPY = frozenset({sqlite3.SQLITE_FULL, sqlite3.SQLITE_READONLY})
"""What can only be the fault of where a copy is written."""

_COPY = re.compile(r"history-([0-9]{4}-[0-9]{2}-[0-9]{2})\.db")
_DAYS = {"daily": 1, "weekly": 7}

Stop = Callable[[], bool]


@dataclass(frozen=True, slots=True, kw_only=True)
class Checked:
    """What a look for damage found.

    Attributes:
        finished: whether it came to its end.
        damage: what is wrong, in SQLite's words, one place each; empty where nothing was found. A changed byte
            that leaves a value possible is no damage to be seen: the file carries no checksums.
    """

    finished: bool
    damage: tuple[str, ...]


def check(path: Path, *, thorough: bool, stop: Stop) -> Checked:
    """Look for damage; nothing is changed.

    Args:
        path: the history.
        thorough: whether indexes are held against their tables too, which takes several times as long.
        stop: asked now and then; the look ends when it says True.

    Raises:
        HistoryError: the file cannot be opened for another reason than damage.
    """
    pragma = "integrity_check" if thorough else "quick_check"
    try:
        with reading(path) as connection:
            connection.set_progress_handler(stop, _STEPS)
            found = connection.execute(f"PRAGMA {pragma}({_MOST_NAMED})").fetchall()
    except sqlite3.Error as error:
        if primary(error) == sqlite3.SQLITE_INTERRUPT:
            return Checked(finished=False, damage=())
        mishap = told(error, path)
        if isinstance(mishap, HistoryDamaged):
            return Checked(finished=True, damage=(plain(str(error)),))
        raise mishap from error
    damage = tuple(plain(str(words)) for (words,) in found if words != "ok")
    return Checked(finished=True, damage=damage)


def copy_due(folder: Path, how_often: Literal["never", "daily", "weekly"], at: int) -> bool:
    """Whether it is time for a copy; one that bears a date to come does not count.

    Args:
        folder: the state folder.
        how_often: the owner's wish.
        at: UTC seconds since 1970.
    """
    if how_often not in _DAYS:
        return False
    today = _date(at)
    past = [made for made, _ in copies(folder) if made <= today]
    return not past or (today - max(past)).days >= _DAYS[how_often]


def copies(folder: Path) -> tuple[tuple[date, Path], ...]:
    """The copies that lie beside a history, newest first."""
    found = []
    with suppress(OSError):
        for path in folder.iterdir():
            named = _COPY.fullmatch(path.name)
            if named is not None:
                with suppress(ValueError):
                    found.append((date.fromisoformat(named[1]), path))
    return tuple(sorted(found, reverse=True))


def make_copy(folder: Path, at: int, *, stop: Stop) -> Path | None:
    """Lay a copy of the history beside it, whole or not at all, and let the oldest ones go.

    Args:
        folder: the state folder.
        at: UTC seconds since 1970; the copy bears its date.
        stop: asked now and then; making ends, and nothing is left of it, when it says True.

    Returns:
        The copy, or None where it was stopped.

    Raises:
        HistoryDamaged: the history is damaged; the copies of before are kept.
        HistoryError: the copy cannot be made.
    """
    source, made = folder / HISTORY, folder / f"history-{_date(at).isoformat()}.db"
    making = folder / f".{made.name}.making"
    try:
        making.unlink(missing_ok=True)
        if not lay_copy(source, making, stop):
            return None
        looked = check(making, thorough=False, stop=stop)
        if looked.damage:
            raise HistoryDamaged(
                f"{plain(str(source))} is damaged: {looked.damage[0]}",
                hint="the copies of before are kept",
            )
        if not looked.finished:
            return None
        give_name(making, made)
    except OSError as error:
        raise told(error, made) from error
    finally:
        with suppress(OSError):
            making.unlink(missing_ok=True)
    for _, path in copies(folder)[COPIES:]:
        with suppress(OSError):
            path.unlink()
    return made


def lay_copy(source: Path, making: Path, stop: Stop) -> bool:
    """Copy a history as it is at one moment into a file that is not there yet.

    Args:
        source: the history.
        making: the copy: one file, which needs no log beside it.
        stop: asked now and then; making ends when it says True.

    Returns:
        Whether it came to its end; whoever calls takes away what is left where it did not.

    Raises:
        HistoryError: SQLite could not read or write.
        OSError: the file cannot be made.
    """
    os.close(os.open(making, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, 0o644))
    try:
        with reading(source) as old, closing(sqlite3.connect(making)) as writing:
            # Within one read transaction all chunks are of one moment, and a commit of the watch does not begin
            # the copy anew.
            old.execute("BEGIN")
            old.execute("SELECT count(*) FROM sqlite_master").fetchone()
            old.backup(writing, pages=_PAGES, progress=lambda *_: _breathe(stop), sleep=_PAUSE)
            old.execute("ROLLBACK")
            # One file that needs no log beside it, so that it can be carried away.
            writing.execute("PRAGMA journal_mode = DELETE")
    except _StoppedError:
        return False
    except sqlite3.Error as error:
        raise told(error, making if primary(error) in _OF_THE_COPY else source) from error
    return True


class _StoppedError(Exception):
    pass


def _breathe(stop: Stop) -> None:
    if stop():
        raise _StoppedError
    time.sleep(_PAUSE)  # the library itself sleeps only where it meets a lock


def give_name(making: Path, made: Path) -> None:
    """Give a finished file its name, so that it is there whole even after a power cut."""
    making.chmod(0o644)
    for path in (making, made.parent):
        descriptor = os.open(path, os.O_RDONLY | os.O_CLOEXEC)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
        if path is making:
            making.replace(made)


@contextmanager
def reading(path: Path) -> Iterator[sqlite3.Connection]:
    """A connection of its own to a history, which changes nothing."""
    # Where no log lies beside it, nobody is writing it: read alone, nothing has to be laid beside it.
    alone = not path.with_name(f"{path.name}-wal").exists()
    uri = path.resolve().as_uri() + ("?mode=ro&immutable=1" if alone else "?mode=ro")
    with closing(sqlite3.connect(uri, uri=True, isolation_level=None, timeout=BUSY_MS / 1000)) as connection:
        yield connection


def _date(at: int) -> date:
    return datetime.fromtimestamp(at, UTC).date()
