"""The watch itself: rounds and traffic on a schedule, from start to end."""

import signal
import threading
import time
from collections.abc import Callable, Mapping
from contextlib import suppress
from functools import partial
from pathlib import Path
from queue import SimpleQueue
from typing import Any

from diskwatch.errors import DiskwatchError, HistoryError
from diskwatch.history.exchange import read
from diskwatch.history.live import LiveWriter
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.machine import choice
from diskwatch.machine.protocol import Machine
from diskwatch.machine.senses import Senses
from diskwatch.records import DriveRound, Entry, IoSpan, Value
from diskwatch.service import requests
from diskwatch.service.arrival import take_in
from diskwatch.service.ears import Ears
from diskwatch.service.keeper import Keeper
from diskwatch.service.owner import DEEDS
from diskwatch.service.removal import MOVE, move_house
from diskwatch.service.requests import Answer
from diskwatch.service.rounds import Rounds
from diskwatch.service.schedule import Schedule
from diskwatch.service.self_tests import SelfTests, Tester
from diskwatch.service.traffic import JUMP, Traffic
from diskwatch.service.turns import Turns
from diskwatch.service.upkeep import EVERY, Upkeep
from diskwatch.settings import Settings
from diskwatch.units import plain

GUARD = 30.0
"""Seconds between two looks of the main thread at the clocks."""

ON_BATTERY = 4
"""On battery one round of so many takes place: asking costs the battery little, but not nothing."""

NEWS_AFTER = 15.0
"""Seconds after which drives are asked of which something was heard: trouble seldom comes alone."""

HAND = 1.5
"""Seconds that a round gets to keep what it has in hand when the watch ends."""

Told = Callable[[tuple[DriveRound, ...]], None]


def now() -> int:
    """The present, UTC seconds since 1970; the one place of this room where the clock is read."""
    return int(time.time())


class Watch:
    """Watches one machine's drives into one history."""

    def __init__(
        self,
        machine: Machine,
        settings: Settings,
        folder: Path,
        *,
        told: Told | None = None,
        senses: Senses | None = None,
        tester: Tester | None = None,
    ) -> None:
        """Open the history; see `diskwatch.service.keeper.Keeper` for what may go wrong.

        Args:
            machine: whose drives.
            settings: the owner's.
            folder: where the history lies.
            told: called with each part of a round once it is kept.
            senses: what else the machine tells of its drives; None for nothing.
            tester: has drives test themselves where the owner's settings ask for it; None for nobody.
        """
        self._machine = machine
        self._settings = settings
        self._folder = folder
        self._told = told
        self._lock = threading.Lock()
        self._keeper = Keeper(folder)
        self._live = LiveWriter(folder)
        watch = settings.watch
        self._traffic = Traffic(machine, now, time.monotonic)
        self._rounds = Rounds(
            machine,
            self._keeper,
            now,
            wanted=lambda who, devices: choice.watched(who, devices, only=watch.only, ignore=watch.ignore),
            turns=Turns(every=settings.smart.every, hung=lambda: self._traffic.hung),
            heard=self._heard,
        )
        self._senses = senses
        self._ears = (
            None
            if senses is None
            else Ears(
                senses,
                self._keeper,
                lock=self._lock,
                blocks=lambda: dict(self._rounds.blocks),
                now=now,
                soon=self._look_soon,
            )
        )
        self._tests = (
            None
            if tester is None
            else SelfTests(
                tester,
                settings.selftest,
                past=self._past_tests,
                note=self._note_entry,
                on_battery=lambda: senses is not None and senses.on_battery(),
            )
        )
        self._deaf: str | None = None
        self._on_battery = 0
        self._schedule = Schedule(self._mishap)
        self._gathered: list[IoSpan] = []
        self._committed = time.monotonic()
        self._rounding = threading.Lock()
        self._stop = threading.Event()
        self._asked = threading.Thread()
        self._ended = False
        self._wanted: Path | None = None
        self._outcome: SimpleQueue[Answer | DiskwatchError] = SimpleQueue()
        self._upkeep = Upkeep(
            self._keeper,
            folder,
            lock=self._lock,
            backup=settings.history.backup,
            now=now,
            ending=self._stop,
        )

    @property
    def trouble(self) -> str | None:
        """What keeps the history from being written; None where nothing does."""
        return self._keeper.trouble

    @property
    def machine_troubles(self) -> tuple[str, ...]:
        """What kept the last listing of the drives from being complete, one sentence each."""
        return self._rounds.troubles

    def once(self) -> tuple[DriveRound, ...]:
        """One full round, and then the end."""
        try:
            self._upkeep.mend_if_damaged()
            self._open_ears()
            done = self._rounds.run(told=self._told, lock=self._lock, everyone=True)
            if self._ears is not None:
                # Only now is it known which drives there are; those that the log speaks of are asked once more.
                self._ears.once()
                done += self._news()
            return done
        finally:
            self._end()

    def run(self) -> Path | None:
        """Watch until SIGTERM, SIGINT or `end`; everything is stored before it returns.

        Returns:
            The state folder in which another watch is to go on, where this one ended for the history to be
            moved; else None.
        """
        for number in (signal.SIGTERM, signal.SIGINT):
            signal.signal(number, lambda *_: self.end())
        schedule = self._schedule
        schedule.every("round", self._settings.smart.every, self._round, place="rounds")
        schedule.every("traffic", self._settings.io.every, self._count)
        if self._settings.io.every > requests.EVERY:
            schedule.every("requests", requests.EVERY, self._look_for_requests)
        schedule.every("upkeep", EVERY, self._upkeep.turn, place="upkeep")
        self._note("watch", "Watching began.")
        self._open_ears()
        schedule.start()
        if self._ears is not None:
            self._ears.start()
        try:
            self._guard(schedule)
        finally:
            schedule.stop()
            self._end("Watching ended.")
        return self._after_moving()

    @property
    def ended(self) -> bool:
        """Whether somebody wants no more watching."""
        return self._ended

    def end(self) -> None:
        """Let `run` come to its end; may be called from any thread or signal handler."""
        self._ended = True
        self._stop.set()

    def _guard(self, schedule: Schedule) -> None:
        """Wait for the end, and notice when the clock is set or the machine has slept."""
        wall, steady = time.time(), time.monotonic()
        while not self._stop.wait(GUARD):
            wall_now, steady_now = time.time(), time.monotonic()
            jump = (wall_now - wall) - (steady_now - steady)
            wall, steady = wall_now, steady_now
            if abs(jump) > JUMP:
                schedule.clock_moved()
                self._note("watch", _jumped(jump))
            with self._lock:
                self._keeper.try_again()

    def _round(self) -> None:
        if self._spares_the_battery():
            return
        with self._rounding:
            done = self._rounds.run(told=self._told, lock=self._lock)
            if self._tests is not None and not self._stop.is_set():
                # A drive that does nothing else is left out of rounds; its result would keep others waiting.
                silent = self._tests.running - {one.known.number for one in done}
                if silent:
                    done += self._rounds.run(told=self._told, lock=self._lock, only=silent)
                self._tests.after(done, self._rounds.found, at=now(), hour=time.localtime().tm_hour)

    def _past_tests(self) -> tuple[Entry, ...] | None:
        """What the day book holds of self-tests; None where it cannot be read."""
        with suppress(DiskwatchError), Past.open(self._folder) as past:
            return past.day_book(kinds={"self-test"})
        return None

    def _spares_the_battery(self) -> bool:
        """Whether this round is left out because the machine runs on its battery."""
        on_battery = self._senses is not None and self._senses.on_battery()
        self._on_battery = self._on_battery + 1 if on_battery else 0
        # The first after the plug was pulled still takes place, and then one of so many.
        return on_battery and (self._on_battery - 1) % ON_BATTERY != 0

    def _open_ears(self) -> None:
        if self._ears is not None:
            self._ears.open()
            self._say_if_deaf()

    def _say_if_deaf(self) -> None:
        """Say in the day book, once, why the kernel cannot be heard."""
        trouble = None if self._ears is None else self._ears.trouble
        if trouble is not None and trouble != self._deaf:
            self._note("trouble", trouble)
        self._deaf = trouble

    def _heard(self, number: int, blocks: tuple[str, ...]) -> tuple[Value, ...]:
        if self._ears is None or self._senses is None:
            return ()
        return (*self._ears.heard(number), *self._senses.kept(blocks))

    def _look_soon(self) -> None:
        """Ask the drives of which something was heard, when the worst of it is over."""
        self._schedule.soon("news", NEWS_AFTER, self._news, place="rounds")

    def _news(self) -> tuple[DriveRound, ...]:
        with self._rounding:
            news = frozenset() if self._ears is None else self._ears.news
            return self._rounds.run(told=self._told, lock=self._lock, only=news) if news else ()

    def _count(self) -> None:
        # Here, since every job of its own would wake the machine once more.
        self._look_for_requests()
        self._say_if_deaf()
        look = self._traffic.look(dict(self._rounds.blocks))
        # First of all what needs no disk: the one that hangs may be the one that the history lies on.
        left_out = {number: why.told for number, why in self._rounds.left_out.items() if why.told is not None}
        self._live.write(look.spans, now(), self._troubles(), left_out)
        self._gathered += look.spans
        if look.entries:
            with self._lock:
                self._keeper.note(*look.entries)
        if time.monotonic() - self._committed >= self._settings.history.commit:
            self._commit_traffic()

    def _look_for_requests(self) -> None:
        """Take up what the owner asks for, in a thread of its own: counting must not wait for it."""
        if requests.waiting(self._folder) and not self._asked.is_alive():
            self._asked = threading.Thread(target=self._take_up, name="takes up requests", daemon=True)
            self._asked.start()

    def _take_up(self) -> None:
        deeds = {"import-history": self._import, MOVE: self._move}
        requests.take_up(
            self._folder, deeds | {name: partial(self._owner, deed) for name, deed in DEEDS.items()}
        )

    def _import(self, words: Mapping[str, Any]) -> Answer:
        lines, _ = read(words["text"])
        # Between two rounds: none may go on from a state that has become another.
        with self._rounding, self._lock:
            told = self._keeper.change(lambda history: take_in(history, lines, now()))
        return Answer(done=told.done, wrong=told.wrong)

    def _owner(
        self, deed: Callable[[History, Mapping[str, Any], int], Answer], words: Mapping[str, Any]
    ) -> Answer:
        # Between two rounds, for the same reason.
        with self._rounding, self._lock:
            return self._keeper.change(lambda history: deed(history, words, now()))

    def _move(self, words: Mapping[str, Any]) -> Answer:
        """End for the history to be moved: only when all is stored and nobody writes can it be whole."""
        self._wanted = Path(str(words["to"]))
        self._stop.set()
        told = self._outcome.get()
        if isinstance(told, DiskwatchError):
            raise HistoryError(
                f"the watch has not moved it and goes on where it was: {told}",
                hint="or end the watch, run this again with the right to write there, and start the watch anew",
            )
        return told

    def _after_moving(self) -> Path | None:
        if self._wanted is None:
            return None
        folder = self._folder
        try:
            moved, told = move_house(folder, self._wanted, now())
            folder = moved.to
            self._outcome.put(told)
        except DiskwatchError as error:
            self._outcome.put(error)
        self._asked.join(HAND)
        return None if self._ended else folder

    def _troubles(self) -> tuple[str, ...]:
        kept = self._keeper.trouble
        return (*self._rounds.troubles, *self._traffic.troubles, *((kept,) if kept is not None else ()))

    def _commit_traffic(self) -> None:
        self._committed = time.monotonic()
        gathered, self._gathered = self._gathered, []
        with self._lock:
            self._keeper.add_traffic(gathered)

    def _mishap(self, text: str) -> None:
        self._note("trouble", plain(text))

    def _note(self, kind: str, text: str) -> None:
        self._note_entry(Entry(at=now(), drive=None, kind=kind, text=text))

    def _note_entry(self, entry: Entry) -> None:
        with self._lock:
            self._keeper.note(entry)

    def _end(self, words: str | None = None) -> None:
        self._rounds.end()
        self._machine.stop()
        if self._ears is not None:
            self._ears.stop()
        # What a round has in hand is kept before the history closes; more than a moment is not waited for.
        self._rounding.acquire(timeout=HAND)
        self._commit_traffic()
        if words is not None:
            self._note("watch", words)
        self._live.close()
        with self._lock:
            self._keeper.close()


def _jumped(seconds: float) -> str:
    way = "forward" if seconds > 0 else "back"
    by = f"{way} by {abs(seconds):.0f} seconds"
    return f"The clock moved {by}, or the machine slept; all jobs were planned anew."
