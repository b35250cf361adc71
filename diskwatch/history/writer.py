"""The one writer of a history."""

import sqlite3
import threading
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Self

from diskwatch.history import packing
from diskwatch.history.arriving import Arrived
from diskwatch.history.bays import drive_lines, standing_calls
from diskwatch.history.beginning import begun, make_file, make_folder, prepared
from diskwatch.history.checks import Readable
from diskwatch.history.folding import fold_in, grown
from diskwatch.history.forecasts import latest_forecasts
from diskwatch.history.holding import Holding
from diskwatch.history.latency import learnt, traffic_days
from diskwatch.history.listening import left_off, totals, write_listened
from diskwatch.history.lock import WatchLock
from diskwatch.history.mending import mend
from diskwatch.history.mishaps import taken_away, told, unreadable
from diskwatch.history.moving import Judge, Part, arrive
from diskwatch.history.opening import refuse_foreign
from diskwatch.history.probes import probes
from diskwatch.history.round import admit, known_drives, write_alone, write_entries, write_round
from diskwatch.history.thinning import thin
from diskwatch.history.traffic import rollups, uncondensed_day, write_class_days, write_spans
from diskwatch.places import HISTORY
from diskwatch.records import (
    Call,
    ClassDay,
    Drive,
    DriveLine,
    DriveRound,
    Entry,
    Forecast,
    IoRollup,
    IoSpan,
    KnownDrive,
    Learnt,
    LeftOff,
    Listened,
    Place,
    ProbeDay,
    Round,
)
from diskwatch.units import DAY


class History:
    """A history open for writing, safe to use from any thread; `close` it, or use it in ``with``.

    Every method that writes does so wholly or not at all, and raises `HistoryError` where it could not.
    """

    def __init__(self, db: Holding, path: Path | None, lock: WatchLock | None) -> None:
        self._db = db
        self._path = path
        self._file = None if path is None else _identity(path)
        self._lock = lock
        self._turn = threading.RLock()
        self._folding = threading.Lock()
        self._closed = False
        self._lasting = True

    @classmethod
    def open(cls, folder: Path) -> "History":
        """Open the history in a folder for writing, making both where they do not exist.

        Raises:
            HistoryHeld: another process is writing it.
            HistoryTooNew: a newer version wrote it; it is left untouched.
            HistoryError: it cannot be written, is damaged or is something else.
        """
        path = folder / HISTORY
        # Twice: first so that nothing is laid beside a file that is not ours, then when nobody else can write.
        refuse_foreign(path)
        make_folder(folder)
        lock = WatchLock.take(folder)
        try:
            refuse_foreign(path)
            make_file(path)
            return cls(begun(path), path, lock)
        except BaseException:
            lock.release()
            raise

    @classmethod
    def in_memory(cls) -> "History":
        """A history that ends with this object, for where none can be written."""
        return cls(prepared(sqlite3.connect(":memory:", check_same_thread=False), None), None, None)

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Let go of the history; everything recorded is in it already. Closing again does nothing."""
        # A connection that folds the log in would keep it beside the file, so it is waited for.
        with self._turn, self._folding:
            self._closed = True
            try:
                # A reader that is open now keeps SQLite from folding the log in by itself when this closes.
                with suppress(sqlite3.Error):
                    self._db.conn.execute("PRAGMA wal_checkpoint(TRUNCATE)")
                self._db.close()
            except sqlite3.Error as error:
                raise told(error, self._path) from error
            finally:
                if self._lock is not None:
                    self._lock.release()

    def known(self) -> tuple[KnownDrive, ...]:
        """All drives that were ever seen, in the order of their numbers."""
        with self._using() as connection:
            return known_drives(connection)

    def lines(self) -> tuple[DriveLine, ...]:
        """All that is known of every drive now, those that departed as well, without traffic."""
        with self._using() as connection:
            return drive_lines(connection)

    def admit(self, drive: Drive, place: Place, at: int) -> KnownDrive:
        """Take up a drive that was never seen before; it gets a number that no other drive ever had.

        Args:
            drive: who it is.
            place: where it is.
            at: when it was first seen, UTC seconds since 1970.
        """
        with self._writing() as connection:
            return admit(connection, drive, place, at)

    def take_up(self, parts: Sequence[DriveRound]) -> None:
        """Write drives, with what is thought of them, that this history does not know yet.

        Args:
            parts: one a drive; their passes are not written.
        """
        with self._writing() as connection:
            for part in parts:
                write_alone(connection, part)

    def mend(self, judge: Judge, readable: Readable, at: int, *, thorough: bool) -> tuple[Entry, ...]:
        """Take out values that cannot be right, and judge anew what hung on them.

        Args:
            judge: says what is thought of a drive of which the state or judgement was lost.
            readable: raises ValueError for a text that is no state of the analyser.
            at: now, UTC seconds since 1970.
            thorough: whether to look at all tables, and not only at those that a watch begins with.

        Returns:
            What the day book says of it now; nothing where nothing was wrong.
        """
        with self._writing() as connection:
            try:
                return mend(connection, judge, readable, at, thorough=thorough)
            except ValueError as error:
                raise unreadable(self._path, error) from error

    def states(self) -> dict[int, str]:
        """The analyser's state of each drive as last recorded, by the drive's number."""
        with self._using() as connection:
            found = connection.execute("SELECT drive, packed FROM analyser_state").fetchall()
            return {drive: packing.unpacked(packed) for drive, packed in found}

    def copies(self, drive: int) -> tuple[tuple[int, str], ...]:
        """Dated exact copies of a drive's state as ``(time of its last pass, state)``, oldest first."""
        with self._using() as connection:
            found = connection.execute(
                "SELECT at, packed FROM kept_state WHERE drive = ? ORDER BY at", (drive,)
            ).fetchall()
            return tuple((at, packing.unpacked(packed)) for at, packed in found)

    def calls(self) -> dict[int, Call]:
        """The call that stands for each drive, by the drive's number."""
        with self._using() as connection:
            return standing_calls(connection)

    def record(self, round_: Round) -> None:
        """Store a round of the watch, all of it or nothing; when this returns it has reached the disk.

        Raises:
            HistoryError: it could not be stored; nothing of it was.
        """
        with self._writing() as connection:
            write_round(connection, round_)

    def listen(self, listened: Listened) -> None:
        """Keep what was heard in the kernel's log, with the place up to which it was read."""
        with self._writing() as connection:
            write_listened(connection, listened)

    def left_off(self, source: str) -> tuple[LeftOff, str] | None:
        """How far a log was read, and what was gathered of troubles under way; None for never."""
        with self._using() as connection:
            return left_off(connection, source)

    def heard_totals(self) -> dict[int, dict[str, int]]:
        """What is counted of each drive besides its own word, by its number and by signal."""
        with self._using() as connection:
            return totals(connection)

    def learnt(self, drive: int) -> Learnt | None:
        """What a drive's latency was learnt from, as last kept; None before the first day of traffic."""
        with self._using() as connection:
            return learnt(connection, drive)

    def traffic_days(
        self, drive: int, *, after: int | None, before: int, most: int
    ) -> tuple[tuple[int, tuple[IoRollup, ...]], ...]:
        """A drive's traffic by UTC day number, oldest first; days without any are left out.

        Args:
            drive: the drive's number.
            after: leave out this day and all before it; None for none.
            before: first day not wanted any more.
            most: how many days to give at most.
        """
        with self._using() as connection:
            return traffic_days(connection, drive, after=after, before=before, most=most)

    def probes(self, drive: int, *, after: int) -> tuple[ProbeDay, ...]:
        """A drive's probes that ended after a time (UTC seconds since 1970), oldest first."""
        with self._using() as connection:
            return probes(connection, drive, after=after)

    def forecasts(self) -> dict[int, tuple[Forecast, ...]]:
        """The latest forecast about each signal, by the drive's number."""
        with self._using() as connection:
            return latest_forecasts(connection)

    def note(self, *entries: Entry) -> None:
        """Add to the day book outside of a round."""
        with self._writing() as connection:
            write_entries(connection, entries)

    def tell(self, drive: int, facts: Mapping[str, str], at: int, *entries: Entry) -> None:
        """Keep what the owner says of a drive, with its lines in the day book, all of it or nothing.

        Args:
            drive: the drive's number.
            facts: values by name, see `diskwatch.records.owner`; an empty one takes the fact back.
            at: when it was said, UTC seconds since 1970.
            entries: for the day book.

        Raises:
            HistoryError: it could not be stored, or there is no such drive; nothing of it was.
        """
        with self._writing() as connection:
            connection.executemany(
                "INSERT OR REPLACE INTO owner_fact (drive, fact, value, at) VALUES (?, ?, ?, ?)",
                [(drive, name, value, at) for name, value in facts.items()],
            )
            write_entries(connection, entries)

    def add_traffic(self, spans: Sequence[IoSpan]) -> None:
        """Add spans of traffic to the minutes and the five minutes that they lie in."""
        with self._writing() as connection:
            write_spans(connection, spans)

    def uncondensed(self, now: int) -> tuple[int, tuple[IoRollup, ...]] | None:
        """The first day that is over and not condensed yet, with all of its roll-ups; None for none.

        Args:
            now: UTC seconds since 1970.
        """
        with self._using() as connection:
            day = uncondensed_day(connection, now)
            return None if day is None else (day, rollups(connection, day * DAY, (day + 1) * DAY, None))

    def condense(self, day: int, condensed: Mapping[int, Sequence[ClassDay]]) -> None:
        """Keep what a day's roll-ups were condensed to, so that they may be thinned.

        Args:
            day: UTC day number, as `uncondensed` gave it.
            condensed: classes of load by the drive's number.
        """
        # What a power cut undoes of it is condensed again: the roll-ups go later, so they go only behind it.
        with self._writing(lasting=False) as connection:
            write_class_days(connection, day, condensed.items())

    def thin(self, now: int) -> bool:
        """Thin a bite of what `diskwatch.history.keeping` no longer keeps in full.

        Args:
            now: UTC seconds since 1970.

        Returns:
            Whether there may be more to thin.
        """
        # What a power cut undoes of it is thinned again: no bite need wait for the disk.
        with self._writing(lasting=False) as connection:
            return thin(connection, now)

    def fold_log(self) -> None:
        """Fold the write-ahead log into the file where it has grown; nobody who writes or reads waits for it.

        Raises:
            HistoryError: its disk is full, it is damaged, or it cannot be written for another reason.
        """
        with self._folding:
            path = self._path
            if not self._closed and path is not None and grown(path) and _identity(path) == self._file:
                fold_in(path)

    def arrive(self, parts: Sequence[Part], judge: Judge, *entries: Entry) -> tuple[Arrived, ...]:
        """Take in pasts from elsewhere, all of them or none.

        Args:
            parts: one a drive.
            judge: says what is thought of a drive now that its past is another; None leaves all as it was.
            entries: for the day book.

        Raises:
            HistoryError: it could not be stored; nothing of it was.
        """
        with self._writing() as connection:
            arrived = tuple(arrive(connection, part, judge) for part in parts)
            write_entries(connection, entries)
            return arrived

    def checked_at(self) -> int | None:
        """When the file was last looked through for damage, UTC seconds since 1970; None for never."""
        with self._using() as connection:
            found = connection.execute("SELECT before FROM thinned WHERE what = 'checked'").fetchone()
            return None if found is None else int(found[0])

    def note_checked(self, at: int) -> None:
        """Remember when the file was looked through and no damage was found, UTC seconds since 1970."""
        with self._writing() as connection:
            connection.execute(
                "INSERT OR REPLACE INTO thinned (what, number, before) VALUES ('checked', 0, ?)", (at,)
            )

    @contextmanager
    def _using(self) -> Iterator[sqlite3.Connection]:
        with self._turn:
            try:
                yield self._db.conn
            except sqlite3.Error as error:
                raise told(error, self._path) from error
            except ValueError as error:
                raise unreadable(self._path, error) from error

    @contextmanager
    def _writing(self, *, lasting: bool = True) -> Iterator[sqlite3.Connection]:
        """A transaction; a lasting one has reached the disk when it ends, and with it all before it.

        Of the others a power cut may undo the last ones: the log is read up to its first gap (SQLite,
        Write-Ahead Logging, 2.2; PRAGMA synchronous).
        """
        with self._turn:
            # SQLite goes on writing into a file that has lost its name, and all of it would be lost in silence.
            if self._path is not None and _identity(self._path) != self._file:
                raise taken_away(self._path)
            try:
                # What a failure left open, where even undoing it failed, must not swallow what comes now.
                self._db.rollback()
                if lasting is not self._lasting:
                    self._db.conn.execute(f"PRAGMA synchronous = {'FULL' if lasting else 'NORMAL'}")
                    self._lasting = lasting
                with self._db.atomic():
                    yield self._db.conn
            except sqlite3.Error as error:
                raise told(error, self._path) from error


def _identity(path: Path) -> tuple[int, int] | None:
    try:
        about = path.stat()
    except OSError:
        return None
    return about.st_dev, about.st_ino
