"""The upkeep of the history: days condensed, old detail thinned, damage looked for, copies laid beside it.

It runs beside the watch and gives way to it: every step that needs the writer holds it for milliseconds.
"""

from collections.abc import Callable
from contextlib import AbstractContextManager
from functools import partial
from pathlib import Path
from threading import Event
from typing import Literal

from diskwatch.errors import DiskwatchError, HistoryDamaged, HistoryError, HistoryGarbled
from diskwatch.history.care import check, copy_due, make_copy
from diskwatch.history.mending import to_mend
from diskwatch.history.rescue import rescue
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import ClassDay, Entry
from diskwatch.service.arrival import refuse_no_state
from diskwatch.service.keeper import Keeper
from diskwatch.trends.load import class_days
from diskwatch.units import DAY, plain

EVERY = 3_600.0
"""Seconds between two turns."""

BREATH = 0.05
"""Seconds between two bites, in which others have the writer."""

CHECK_DAYS = 7
"""Days between two thorough looks for damage; a quick one follows every start."""


class Upkeep:
    """Keeps one history in order; belongs to one thread, shares the keeper under its lock."""

    def __init__(
        self,
        keeper: Keeper,
        folder: Path,
        *,
        lock: AbstractContextManager[object],
        backup: Literal["never", "daily", "weekly"],
        now: Callable[[], int],
        ending: Event,
    ) -> None:
        """Begin.

        Args:
            keeper: whose history.
            folder: where it lies.
            lock: held while the keeper is used.
            backup: how often a copy is laid beside the history.
            now: UTC seconds since 1970.
            ending: set when the watch ends; a look or a copy under way is then given up.
        """
        self._keeper = keeper
        self._folder = folder
        self._lock = lock
        self._backup = backup
        self._now = now
        self._ending = ending
        self._looked = False
        self._said: str | None = None

    def turn(self) -> None:
        """Do what is due."""
        self.mend_if_damaged()
        for step in (self._condense, self._thin, self._look, self._copy):
            if not self._ending.is_set():
                self._try(step)

    def mend_if_damaged(self) -> None:
        """Set a damaged history aside, where the keeper has met one."""
        with self._lock:
            damaged = self._keeper.damaged
        if damaged:
            self._try(self._mend)

    def _try(self, step: Callable[[], None]) -> None:
        """Do one step; what keeps it from being done is said once, and no reason to leave the others out."""
        try:
            step()
        except HistoryDamaged as error:
            self._say(f"{error}.")
            self._try(self._mend)
        except HistoryGarbled as error:
            self._say(f"{error}.")
            if step != self._take_out:
                self._try(self._take_out)
        except DiskwatchError as error:
            self._say(f"The upkeep of the history failed: {error}.")

    def _say(self, text: str) -> None:
        if text != self._said:
            self._said = text
            with self._lock:
                self._keeper.note(Entry(at=self._now(), drive=None, kind="trouble", text=plain(text)))

    def _condense(self) -> None:
        while not self._ending.is_set():
            with self._lock:
                found = self._keeper.ask(lambda history: history.uncondensed(self._now()))
            if found is None:
                return
            day, rollups = found
            condensed: dict[int, tuple[ClassDay, ...]] = {
                drive: class_days(one for one in rollups if one.drive == drive)
                for drive in {one.drive for one in rollups}
            }
            keep = partial(History.condense, day=day, condensed=condensed)
            with self._lock:
                self._keeper.ask(keep)
            self._fold()
            self._ending.wait(BREATH)

    def _thin(self) -> None:
        more: bool | None = True
        while more and not self._ending.is_set():
            with self._lock:
                more = self._keeper.ask(lambda history: history.thin(self._now()))
            self._fold()
            self._ending.wait(BREATH)

    def _fold(self) -> None:
        with self._lock:
            history = self._keeper.ask(lambda history: history)
        # Without the lock: this waits for the disk, and no round shall.
        if history is not None:
            history.fold_log()

    def _look(self) -> None:
        at = self._now()
        with self._lock:
            last = self._keeper.ask(History.checked_at)
        thorough = last is None or not 0 <= at - last < CHECK_DAYS * DAY
        if self._looked and not thorough:
            return
        path = self._folder / HISTORY
        if not path.exists():
            return  # the keeper has said so already
        found = check(path, thorough=thorough, stop=self._ending.is_set)
        if found.damage:
            raise HistoryDamaged(f"{path} is damaged: {found.damage[0]}")
        if found.finished:
            self._looked = True
            if thorough:
                with self._lock:
                    self._keeper.ask(lambda history: history.note_checked(at))
            self._mend_values()

    def mend_values(self) -> None:
        """Look for values that cannot be right, and take them out."""
        self._try(self._mend_values)

    def _mend_values(self) -> None:
        path = self._folder / HISTORY
        if path.exists() and to_mend(path, refuse_no_state):
            self._take_out()

    def _take_out(self) -> None:
        """Take out values that cannot be right; that is rare, so nobody minds the wait."""
        with self._lock:
            self._keeper.mend()

    def _copy(self) -> None:
        at = self._now()
        with self._lock:
            reachable = self._keeper.trouble is None
        if reachable and copy_due(self._folder, self._backup, at):
            make_copy(self._folder, at, stop=self._ending.is_set)

    def _mend(self) -> None:
        with self._lock:
            self._keeper.let_go("The history is damaged; what can be read of it is being carried over.")
        try:
            rescue(self._folder, self._now())
        except HistoryDamaged as error:
            raise HistoryError(error.what, hint=error.hint) from error
        finally:
            with self._lock:
                self._keeper.come_back()
