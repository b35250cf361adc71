"""The watch itself: rounds and traffic on a schedule, from start to end."""

import signal
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import replace
from enum import Enum
from pathlib import Path
from queue import Empty, SimpleQueue

from diskwatch.errors import DiskwatchError, SettingsError
from diskwatch.history.live import LiveWriter
from diskwatch.history.reader import Past
from diskwatch.machine import choice
from diskwatch.machine.probe import Prober
from diskwatch.machine.protocol import Machine
from diskwatch.machine.senses import Senses
from diskwatch.records import CallWord, DriveRound, Entry, IoSpan, ProbeDay, Value
from diskwatch.service import requests
from diskwatch.service.clocks import ClockGuard, Clocks
from diskwatch.service.ears import Ears
from diskwatch.service.keeper import Keeper
from diskwatch.service.manager import Manager, status
from diskwatch.service.probing import Probing
from diskwatch.service.progress import Progress
from diskwatch.service.rounds import Rounds
from diskwatch.service.schedule import Schedule, now_steady
from diskwatch.service.self_tests import SelfTests, Tester
from diskwatch.service.traffic import Traffic
from diskwatch.service.turns import Turns
from diskwatch.service.upkeep import EVERY, Upkeep
from diskwatch.service.wishes import Wishes
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

ROUND_PATIENCE = 900.0
"""Seconds beyond two intervals after which a round that does not come to its end counts as stuck."""

COUNT_PATIENCE = 60.0
"""Seconds without a look at the traffic after which the watch counts as stuck, at the least."""

Told = Callable[[tuple[DriveRound, ...]], None]


class _Word(Enum):
    """What the main thread is asked to do."""

    END = "end"
    REREAD = "reread"
    ROUND = "round"


def now() -> int:
    """The present, UTC seconds since 1970; the one place of this room where the clock is read."""
    return int(time.time())


def clocks() -> Clocks:
    """All clocks of this machine."""
    return Clocks(wall=time.time(), steady=now_steady(), awake=time.monotonic())


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
        prober: Prober | None = None,
        reread: Callable[[], None] | None = None,
        manager: Manager | None = None,
    ) -> None:
        """Open the history; see `diskwatch.service.keeper.Keeper` for what may go wrong.

        Args:
            machine: whose drives.
            settings: the owner's.
            folder: where the history lies.
            told: called with each part of a round once it is kept.
            senses: what else the machine tells of its drives; None for nothing.
            tester: has drives test themselves where the owner's settings ask for it; None for nobody.
            prober: probes disks where the owner's settings ask for it; None for nobody.
            reread: reads the settings again for the watch that goes on after this one, or raises
                `diskwatch.errors.SettingsError`; None where they stay as they are.
            manager: who is told how the watch gets on; None for whoever started this process.
        """
        self._machine = machine
        self._settings = settings
        self._folder = folder
        self._told = told
        self._lock = threading.Lock()
        self._keeper = Keeper(folder, now=now)
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
            probed=self._probed,
        )
        self._senses = senses
        self._ears = (
            None
            if senses is None
            else Ears(
                senses,
                self._keeper,
                lock=self._lock,
                blocks=lambda: self._rounds.blocks,
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
                on_battery=self._is_on_battery,
            )
        )
        self._prober = prober
        self._probing = (
            None
            if prober is None or not settings.probe.enabled
            else Probing(
                prober,
                past=self._past_probes,
                on_battery=self._is_on_battery,
                ours=lambda number, so: self._traffic.leave_out(number, ours=so),
                note=self._note_entry,
            )
        )
        self._deaf: str | None = None
        self._on_battery = 0
        self._schedule = Schedule(self._mishap)
        self._gathered: list[tuple[int, IoSpan]] = []
        self._committed = time.monotonic()
        self._rounding = threading.Lock()
        self._stop = threading.Event()
        # Signal handlers may put something in here at any moment; an event's lock they could meet held.
        self._words: SimpleQueue[_Word] = SimpleQueue()
        self._reread = reread
        self._again = False
        self._manager = Manager() if manager is None else manager
        self._progress = Progress()
        self._stuck: tuple[str, ...] = ()
        self._calls: dict[int, CallWord | None] = {}
        self._ended = False
        self._wishes = Wishes(
            folder,
            self._keeper,
            between_rounds=self._between_rounds,
            end=lambda: self._words.put(_Word.END),
            now=now,
        )
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
            self._upkeep.mend_values()
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

        SIGHUP lets the settings be read again, SIGUSR1 makes a round at once.

        Returns:
            The state folder in which another watch is to go on, where this one ended for the history to be
            moved or for other settings; else None.
        """
        self.hear_signals()
        schedule = self._schedule
        schedule.every("round", self._settings.smart.every, self._round, place="rounds")
        schedule.every("traffic", self._settings.io.every, self._count)
        if self._settings.io.every > requests.EVERY:
            schedule.every("requests", requests.EVERY, self._wishes.look)
        schedule.every("upkeep", EVERY, self._upkeep.turn, place="upkeep")
        self._note("watch", "Watching began.")
        self._open_ears()
        self._expect_progress()
        schedule.start()
        if self._ears is not None:
            self._ears.start()
        self._manager.ready()
        try:
            self._guard(schedule)
        finally:
            self._stop.set()
            if self._ended:
                self._manager.stopping()
            schedule.stop()
            self._end("Watching ended, to go on with other settings." if self._again else "Watching ended.")
        if self._again and not self._wishes.moves:
            return None if self._ended else self._folder
        moved = self._wishes.moved()
        return None if self._ended else moved

    def hear_signals(self) -> None:
        """Let the signals to this process speak to this watch from now on, as `run` does anyhow."""
        for number in (signal.SIGTERM, signal.SIGINT):
            signal.signal(number, lambda *_: self.end())
        if self._reread is not None:
            signal.signal(signal.SIGHUP, lambda *_: self._words.put(_Word.REREAD))
        signal.signal(signal.SIGUSR1, lambda *_: self._words.put(_Word.ROUND))

    def _expect_progress(self) -> None:
        # A clock without sleep: what the machine sleeps away is nobody's delay.
        at, owner = time.monotonic(), self._settings
        self._progress.expect("the counting of traffic", max(COUNT_PATIENCE, 3 * owner.io.every), at)
        self._progress.expect("the rounds", 2 * owner.smart.every + ROUND_PATIENCE, at)

    @property
    def ended(self) -> bool:
        """Whether somebody wants no more watching."""
        return self._ended

    def end(self) -> None:
        """Let `run` come to its end; may be called from any thread or signal handler."""
        self._ended = True
        self._words.put(_Word.END)

    def _guard(self, schedule: Schedule) -> None:
        """Wait for the end, and notice when clocks are set, the machine slept or work stands still."""
        clock = ClockGuard(clocks)
        while True:
            try:
                word = self._words.get(timeout=GUARD)
            except Empty:
                word = None
            if word is _Word.END or (word is _Word.REREAD and self._takes_up_settings()):
                return
            if word is _Word.ROUND:
                schedule.soon("asked", 0.0, self._asked_round, place="rounds")
            moved = clock.look()
            if moved is not None:
                schedule.clock_moved()
                self._note("watch", moved.sentence())
            self._tell_progress()
            with self._lock:
                self._keeper.try_again()

    def _takes_up_settings(self) -> bool:
        """Whether there are other settings, with which another watch is to go on."""
        if self._reread is None:
            return False
        try:
            self._reread()
        except SettingsError as error:
            self._note("trouble", plain(f"{error}; the settings that held before go on."))
            return False
        self._again = True
        self._manager.reloading()
        return True

    def _tell_progress(self) -> None:
        """Feed systemd's watchdog, unless the work does not get on."""
        late = self._progress.late(time.monotonic())
        if not late:
            self._manager.alive()
        elif late != self._stuck:
            self._note("trouble", f"The watch does not get on with {' and '.join(late)}.")
        self._stuck = late

    @contextmanager
    def _between_rounds(self) -> Iterator[None]:
        with self._rounding, self._lock:
            yield

    def _asked_round(self) -> None:
        """A round now, since somebody wants one; also on battery."""
        with self._rounding:
            self._note_calls(self._rounds.run(told=self._told, lock=self._lock, everyone=True))

    def _note_calls(self, done: tuple[DriveRound, ...]) -> None:
        self._calls |= {one.known.number: None if one.call is None else one.call.word for one in done}
        self._manager.doing(status(self._calls, now()))

    def _round(self) -> None:
        self._progress.done("the rounds", time.monotonic())
        if self._spares_the_battery():
            return
        with self._rounding:
            done = self._rounds.run(told=self._told, lock=self._lock)
            self._note_calls(done)
            if self._tests is not None and not self._stop.is_set():
                # A drive that does nothing else is left out of rounds; its result would keep others waiting.
                silent = self._tests.running - {one.known.number for one in done}
                if silent:
                    done += self._rounds.run(told=self._told, lock=self._lock, only=silent)
                self._tests.after(done, self._rounds.found, at=now(), hour=time.localtime().tm_hour)
            self._probe(done)
        self._progress.done("the rounds", time.monotonic())

    def _probe(self, done: tuple[DriveRound, ...]) -> None:
        """Probe a disk that has just answered, where it is due, and take in at once what that brought."""
        if self._probing is None or self._stop.is_set():
            return
        testing = frozenset() if self._tests is None else self._tests.running
        ready = self._probing.after(done, self._rounds.found, now=now, testing=testing)
        if ready and not self._stop.is_set():
            self._rounds.run(told=self._told, lock=self._lock, only=ready)

    def _probed(self, number: int) -> ProbeDay | None:
        return None if self._probing is None else self._probing.take(number)

    def _past_probes(self, number: int, after: int) -> tuple[ProbeDay, ...] | None:
        with suppress(DiskwatchError), self._lock:
            return self._keeper.ask(lambda history: history.probes(number, after=after))
        return None

    def _past_tests(self) -> tuple[Entry, ...] | None:
        """What the day book holds of self-tests; None where it cannot be read."""
        with suppress(DiskwatchError), Past.open(self._folder) as past:
            return past.day_book(kinds={"self-test"})
        return None

    def _is_on_battery(self) -> bool:
        return self._senses is not None and self._senses.on_battery()

    def _spares_the_battery(self) -> bool:
        """Whether this round is left out because the machine runs on its battery."""
        on_battery = self._is_on_battery()
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
        self._wishes.look()
        self._say_if_deaf()
        epoch = self._keeper.epoch
        look = self._traffic.look(self._rounds.blocks)
        # First of all what needs no disk: the one that hangs may be the one that the history lies on.
        left_out = {number: why.told for number, why in self._rounds.left_out.items() if why.told is not None}
        self._live.write(look.spans, now(), self._troubles(), left_out)
        self._gathered += [(epoch, span) for span in look.spans]
        if look.entries:
            with self._lock:
                self._keeper.note(*look.entries)
        if time.monotonic() - self._committed >= self._settings.history.commit:
            self._commit_traffic()
        self._progress.done("the counting of traffic", time.monotonic())

    def _troubles(self) -> tuple[str, ...]:
        kept = self._keeper.trouble
        return (*self._rounds.troubles, *self._traffic.troubles, *((kept,) if kept is not None else ()))

    def _commit_traffic(self) -> None:
        self._committed = time.monotonic()
        gathered, self._gathered = self._gathered, []
        with self._lock:
            # Since a span was counted its drive may have got another number.
            numbered = ((span, self._keeper.called_now(span.drive, since=epoch)) for epoch, span in gathered)
            self._keeper.add_traffic([replace(span, drive=number) for span, number in numbered])

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
        if self._prober is not None:
            self._prober.stop()
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
