"""Reading a history: for any user who may read the file, with the watch running or not.

Nothing here creates or changes anything, and nothing but the standard library is loaded: commands that only
read start at once.
"""

import sqlite3
import threading
from collections.abc import Callable, Collection
from dataclasses import replace
from pathlib import Path
from typing import Self, TypeVar

from diskwatch.errors import HistoryError
from diskwatch.history import proof, questions
from diskwatch.history.bays import all_that_can_be_read, drive_lines
from diskwatch.history.counting import counted_before
from diskwatch.history.exchange import Line
from diskwatch.history.forecasts import Kept, kept_forecasts, latest_forecasts
from diskwatch.history.leaving import lines_of
from diskwatch.history.live import Live, read_live
from diskwatch.history.lock import watcher
from diskwatch.history.mishaps import told, unreadable
from diskwatch.history.naming import choose
from diskwatch.history.opening import Opened, open_to_read
from diskwatch.history.proof import Copy, Plugged, Printed, SignalPast
from diskwatch.history.traffic import class_days, rollups
from diskwatch.history.ways import ways
from diskwatch.places import HISTORY
from diskwatch.records import (
    Attribute,
    Bays,
    ClassDay,
    DriveLine,
    Entry,
    Forecast,
    IoRollup,
    IoSpan,
    Pass,
    PassDay,
    Reading,
    Way,
)
from diskwatch.units import plain

_Answer = TypeVar("_Answer")
_TRIES = 4


class Past:
    """A history open for reading, safe to use from any thread; `close` it, or use it in ``with``.

    Every answer is of one moment. Where the history is moved away, brought back or taken up by a watch while
    this is open, the next question sees that.
    """

    def __init__(self, folder: Path, opened: Opened) -> None:
        self._folder = folder
        self._path = folder / HISTORY
        self._opened: Opened | None = opened
        self._closed = False
        self._turn = threading.Lock()

    @classmethod
    def open(cls, folder: Path) -> "Past":
        """Open the history in a folder.

        Raises:
            NothingToWorkOn: there is none yet; says how to start.
            HistoryTooNew: a newer version wrote it.
            HistoryError: it cannot be read.
        """
        return cls(folder, open_to_read(folder / HISTORY))

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Let go of the history. Closing again does nothing."""
        with self._turn:
            self._closed = True
            self._let_go()

    def bays(self, now: int) -> Bays:
        """All drives as last known, worst call first, with their traffic where somebody measures it now.

        Those whose place another drive has taken stand apart.

        Args:
            now: UTC seconds since 1970.
        """
        lines, odd = self._ask(all_that_can_be_read)
        who = watcher(self._folder)
        # What a watch that has ended left behind is nobody's present.
        live = Live() if who is None else read_live(self._folder, now)
        spans = {span.drive: span for span in live.spans}
        shown = [
            replace(line, traffic=spans.get(line.number), left_out=live.left_out.get(line.number))
            for line in lines
        ]
        return Bays(
            at=now,
            watcher=who,
            drives=tuple(line for line in shown if not line.departed),
            trouble=(*live.troubles, *odd),
            departed=tuple(line for line in shown if line.departed),
        )

    def find(self, text: str) -> DriveLine:
        """The drive that a person means by a serial, WWN, device name, label or an unambiguous part of one.

        Raises:
            DriveUnknown: no drive fits, or more than one; the candidates are named.
        """
        return choose(text, self._ask(drive_lines))

    def day_book(
        self,
        since: int | None = None,
        drive: int | None = None,
        kinds: Collection[str] | None = None,
        limit: int | None = None,
    ) -> tuple[Entry, ...]:
        """What happened, oldest first.

        Args:
            since: leave out what is older, UTC seconds since 1970.
            drive: only what concerns this drive.
            kinds: only these kinds.
            limit: only the newest so many.
        """
        return self._ask(lambda connection: questions.day_book(connection, since, drive, kinds, limit))

    def series(
        self, drive: int, signal: str, since: int | None = None
    ) -> tuple[tuple[int, int | str | None], ...]:
        """A signal's changes as ``(at, value)``, oldest first; a value holds until the next one.

        Args:
            drive: the drive's number.
            signal: the signal's name.
            since: from here on, UTC seconds since 1970; the value that held then comes first, with the earlier
                time at which it was stored.
        """
        return self._ask(lambda connection: questions.series(connection, drive, signal, since))

    def passes(self, drive: int, since: int | None = None, limit: int | None = None) -> tuple[Pass, ...]:
        """How asking a drive went, oldest first; what was read stands in the series.

        Of what is older than some 13 weeks only changes of outcome are left, and `pass_days` has the counts.

        Args:
            drive: the drive's number.
            since: leave out what is older, UTC seconds since 1970.
            limit: only the newest so many.
        """
        return self._ask(lambda connection: questions.passes(connection, drive, since, limit))

    def pass_days(self, drive: int, since: int | None = None) -> tuple[PassDay, ...]:
        """How many passes of each UTC day ended how, oldest first, for ever and exact.

        Args:
            drive: the drive's number.
            since: leave out earlier days, UTC seconds since 1970.
        """
        return self._ask(lambda connection: questions.pass_days(connection, drive, since))

    def evidence(self, drive: int, signal: str, since: int | None = None) -> tuple[tuple[int, float], ...]:
        """A ledger's evidence as ``(day, M)``, oldest first; days count from 1970-01-01, M is in days.

        Args:
            drive: the drive's number.
            signal: the signal's name.
            since: leave out earlier days, UTC seconds since 1970.
        """
        return self._ask(lambda connection: questions.evidence(connection, drive, signal, since))

    def strongest(self, since: int) -> dict[int, tuple[tuple[int, float], ...]]:
        """Every drive's strongest evidence of a day as ``(day, M)``, by the drive's number, oldest first.

        Args:
            since: leave out earlier days, UTC seconds since 1970.
        """
        return self._ask(lambda connection: questions.strongest(connection, since))

    def traffic(self, drive: int, since: int, until: int) -> tuple[IoSpan, ...]:
        """A drive's traffic by the minute, of which seven days are kept, oldest first.

        In each, ``at`` is the minute's end and ``seconds`` the time that was measured.

        Args:
            drive: the drive's number.
            since: first second wanted, UTC seconds since 1970.
            until: first second not wanted any more.
        """
        return self._ask(lambda connection: questions.traffic(connection, drive, since, until))

    def rollups(self, drive: int, since: int, until: int) -> tuple[IoRollup, ...]:
        """A drive's traffic by five minutes, of which 90 days are kept, oldest first.

        Args:
            drive: the drive's number.
            since: first second wanted, UTC seconds since 1970.
            until: first second not wanted any more.
        """
        return self._ask(lambda connection: rollups(connection, since, until, drive))

    def class_days(self, drive: int, since: int, until: int) -> tuple[tuple[int, ClassDay], ...]:
        """A drive's mean times by day and class of load as ``(day, class)``, kept for ever, oldest first.

        Args:
            drive: the drive's number.
            since: first UTC day number wanted.
            until: first UTC day number not wanted any more.
        """
        return self._ask(lambda connection: class_days(connection, drive, since, until))

    def forecasts(self, drive: int) -> tuple[Forecast, ...]:
        """The latest forecast about each signal of a drive."""
        return self._ask(lambda connection: latest_forecasts(connection).get(drive, ()))

    def kept_forecasts(self, drive: int) -> tuple[Kept, ...]:
        """Every forecast about a drive with what became of it, by signal, oldest first."""
        return self._ask(lambda connection: kept_forecasts(connection, drive))

    def last_reading(self, drive: int) -> Reading | None:
        """Attribute table, self-test log and limits as last read, without values; None before that."""
        return self._ask(lambda connection: questions.last_reading(connection, drive))

    def attributes(self, drive: int) -> tuple[Attribute, ...]:
        """An ATA drive's attribute table as last read; empty for other drives."""
        found = self.last_reading(drive)
        return () if found is None else found.attributes

    def lines(self, drive: int) -> tuple[Line, ...]:
        """All of a drive's past that can travel, see `diskwatch.history.exchange`."""
        return self._ask(lambda connection: tuple(lines_of(connection, drive)))

    def state(self, drive: int) -> str | None:
        """The analyser's state of a drive as last recorded, or None."""
        return self._ask(lambda connection: questions.state(connection, drive))

    def ways(self) -> tuple[Way, ...]:
        """What was found out of USB adapters on this machine, one an adapter."""
        return self._ask(ways)

    def signal_pasts(self, drive: int) -> tuple[SignalPast, ...]:
        """Every signal of a drive from its first value on, by name."""
        return self._ask(lambda connection: proof.signal_pasts(connection, drive))

    def places(self, drive: int) -> tuple[Plugged, ...]:
        """Where a drive has been plugged in, oldest first."""
        return self._ask(lambda connection: proof.places(connection, drive))

    def copies(self, drive: int) -> tuple[Copy, ...]:
        """The dated exact copies of a drive's state, oldest first."""
        return self._ask(lambda connection: proof.copies(connection, drive))

    def state_of(self, drive: int, of: Copy) -> str | None:
        """The analyser's state that a copy holds; None where there is no such copy."""
        return self._ask(lambda connection: proof.state_of(connection, drive, of))

    def followed(self, drive: int, signals: Collection[str], after: Copy | None) -> tuple[Pass, ...]:
        """Passes that read a drive after a copy of its state, with these signals alone, oldest first.

        Of passes that were thinned those stand in their place that a day's ledger asks for.
        """
        return self._ask(lambda connection: proof.followed(connection, drive, signals, after))

    def exact_from(self, drive: int) -> int:
        """From when on all passes of a drive are kept, UTC seconds since 1970."""
        return self._ask(lambda connection: counted_before(connection, drive))

    def printed(self, drive: int) -> Printed | None:
        """What smartctl last printed of a drive, as far as it was kept; None where nothing was."""
        return self._ask(lambda connection: proof.printed(connection, drive))

    def _ask(self, question: Callable[[sqlite3.Connection], _Answer]) -> _Answer:
        with self._turn:
            for _ in range(_TRIES):
                opened = self._current()
                try:
                    answer = _at_one_moment(opened.connection, question)
                except sqlite3.Error as error:
                    if not opened.lasting and not opened.holds():
                        continue  # somebody began to write: what was read may be half of this and half of that
                    raise told(error, self._path) from error
                except ValueError as error:
                    if not opened.lasting and not opened.holds():
                        continue
                    raise unreadable(self._path, error) from error
                if opened.lasting or opened.holds():
                    return answer
        raise HistoryError(f"{plain(str(self._path))} changes faster than it can be read", hint="try again")

    def _current(self) -> Opened:
        if self._closed:
            raise RuntimeError("this history was closed")
        if self._opened is not None and not self._opened.holds():
            self._let_go()
        if self._opened is None:
            self._opened = open_to_read(self._path)
        return self._opened

    def _let_go(self) -> None:
        if self._opened is not None:
            self._opened.close()
            self._opened = None


def _at_one_moment(
    connection: sqlite3.Connection, question: Callable[[sqlite3.Connection], _Answer]
) -> _Answer:
    # A transaction makes several statements see one moment; it ends at once, for an open one lets the log grow.
    connection.execute("BEGIN")
    try:
        return question(connection)
    finally:
        connection.execute("ROLLBACK")
