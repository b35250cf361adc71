"""Listens to the kernel's log in a thread of its own: events go to the day book, counts to the next pass.

The thread sleeps until the kernel speaks, so that silence costs nothing, and reads on without a pause while
lines come in: what it does not fetch in time the kernel overwrites. A pass is only told of what is kept
already, so that after a sudden end nothing is counted twice and nothing falls back.
"""

import os
import select
import threading
from collections.abc import Callable, Mapping
from contextlib import AbstractContextManager
from dataclasses import replace

import msgspec

from diskwatch.errors import DiskwatchError
from diskwatch.judge import heard_told
from diskwatch.machine.kernel_events import QUIET, Found, Gathered, hear, settle
from diskwatch.machine.senses import Log, Senses
from diskwatch.records import (
    KERNEL_LOG,
    Entry,
    Event,
    EventKind,
    Listened,
    SignalKind,
    Value,
)
from diskwatch.service.keeper import Keeper
from diskwatch.units import plain

FILE_EVERY = 2.0
"""Seconds between two looks at a log that is a file: nothing tells when it grows."""

KEEP_EVERY = 5.0
"""Seconds between two commits at least, while events keep coming in."""

RENAMED_EVERY = 2.0
"""Seconds between two looks at which drive goes by which name at least."""

MOST_TOLD = 20
"""Events of one kind of one drive that the day book tells one by one within an hour; all are counted."""

_HOUR = 3_600
_FOLLOWED = ("kernel-io-errors", "link-resets", "kernel-timeouts")
_LAST = "last-unreadable-sector"
_COUNTS: Mapping[EventKind, tuple[str, ...]] = {
    EventKind.UNREADABLE: ("kernel-io-errors", "unreadable-sectors"),
    EventKind.UNWRITABLE: ("kernel-io-errors", "failed-writes"),
    EventKind.FAILED: ("kernel-io-errors",),
    EventKind.NVME: ("kernel-io-errors",),
    EventKind.PASSING: (),
    EventKind.LINK_RESET: ("link-resets",),
    EventKind.LINK_SLOWED: ("link-resets",),
    EventKind.TIMED_OUT: ("kernel-timeouts",),
    EventKind.OFFLINED: ("dropouts",),
    EventKind.CONTROLLER_DOWN: ("dropouts",),
    EventKind.FILE_SYSTEM: ("file-system-errors",),
    EventKind.ARRAY: ("array-dropouts",),
}
"""Which signals an event counts in."""


class Ears:
    """Follows one log; what it hears is kept by the keeper, under its lock."""

    def __init__(
        self,
        senses: Senses,
        keeper: Keeper,
        *,
        lock: AbstractContextManager[object],
        blocks: Callable[[], Mapping[int, tuple[str, ...]]],
        now: Callable[[], int],
        soon: Callable[[], None] = lambda: None,
    ) -> None:
        """Begin; nothing is opened yet.

        Args:
            senses: whose log.
            keeper: where events and counts are kept.
            lock: held while the keeper is used.
            blocks: kernel names of each drive's block devices, by the drive's number; none yet before the first
                round.
            now: UTC seconds since 1970.
            soon: called when something happened that a round should look at.
        """
        self._senses = senses
        self._keeper = keeper
        self._lock = lock
        self._blocks = blocks
        self._now = now
        self._soon = soon
        self._gathered = Gathered()
        self._totals: dict[int, dict[str, int]] = {}
        self._kept: dict[int, dict[str, int]] = {}
        self._news: set[int] = set()
        self._changed: set[int] = set()
        self._names: dict[str, tuple[str, ...]] = {}
        self._named_at = float("-inf")
        self._kept_at = float("-inf")
        self._entries: list[Entry] = []
        self._told: dict[tuple[int, EventKind], tuple[int, int]] = {}
        self._lost = 0
        self._spoke = 0.0
        self._line = 0.0
        self._log: Log | None = None
        self._epoch = keeper.epoch
        self._wake = -1, -1
        self._thread = threading.Thread(target=self._follow, name="listens to the kernel", daemon=True)
        self.trouble: str | None = None
        """Why nothing is heard; None while it is."""

    def open(self) -> None:
        """Open the log where it was left; without the right to, `trouble` says so and nothing is heard."""
        with self._lock:
            kept = self._keeper.left_off(self._senses.source)
            self._kept, self._epoch = self._keeper.heard_totals(), self._keeper.epoch
        self._totals = {number: dict(counts) for number, counts in self._kept.items()}
        left_off, gathered = kept if kept is not None else (None, "")
        try:
            self._log = self._senses.log(left_off)
        except DiskwatchError as error:
            self.trouble = str(error)
            return
        if gathered and left_off is not None and self._log.left_off.log in {left_off.log, ""}:
            # One that another version wrote is no loss worth a word: a trouble under way is heard again soon.
            try:
                self._gathered = msgspec.json.decode(gathered, type=Gathered)
            except msgspec.MsgspecError:
                self._gathered = Gathered()

    def start(self) -> None:
        """Listen until `stop`."""
        if self._log is not None:
            self._wake = os.pipe2(os.O_NONBLOCK | os.O_CLOEXEC)
            self._thread.start()

    def stop(self) -> None:
        """Listen no more, and keep what was heard."""
        if self._thread.is_alive():
            os.write(self._wake[1], b".")
            self._thread.join()
        for end in self._wake:
            if end >= 0:
                os.close(end)
        self._wake = -1, -1
        if self._log is not None:
            self._tell_of_more(at_end=True)
            self._keep()
            self._log.close()
            self._log = None

    def once(self) -> None:
        """Take in all that the log holds now."""
        if self._log is None or not self._blocks():
            return
        try:
            while self._hear():
                pass
        except DiskwatchError as error:
            self.trouble = str(error)
        # No line of a file is still to come, as far as one can know.
        self._take(settle(self._gathered, self._clock() if self._log.live else float("inf")))
        self._keep()

    @property
    def news(self) -> frozenset[int]:
        """Numbers of the drives of which something was heard that no pass has taken in yet."""
        return frozenset(self._news)

    def heard(self, number: int) -> tuple[Value, ...]:
        """What is counted of a drive, for the pass that takes it in; the caller holds the lock."""
        self._news.discard(number)
        if self._log is None:
            return ()
        # The thread that listens begins anew by itself, since it may be at work on its counts just now.
        kept = self._kept if self._epoch == self._keeper.epoch else self._keeper.heard_totals()
        counts = {**dict.fromkeys(_FOLLOWED, 0), **kept.get(number, {})}
        return tuple(
            Value(
                signal=signal,
                value=count,
                unit="sectors" if signal == _LAST else "events",
                kind=SignalKind.GAUGE if signal == _LAST else SignalKind.COUNT,
                source=KERNEL_LOG,
            )
            for signal, count in sorted(counts.items())
        )

    def _begin_anew_if_void(self) -> None:
        """Count on from what the history holds, where its past became another; the caller holds the lock."""
        since, self._epoch = self._epoch, self._keeper.epoch
        if since == self._epoch:
            return
        heard = {number: _beyond(self._totals[number], self._kept.get(number, {})) for number in self._changed}
        numbers = {one: self._keeper.called_now(one, since=since) for one in self._totals.keys() | self._news}
        self._kept = self._keeper.heard_totals()
        totals = {number: dict(counts) for number, counts in self._kept.items()}
        for number, counts in heard.items():
            here = totals.setdefault(numbers[number], {})
            here.update({name: by + (0 if name == _LAST else here.get(name, 0)) for name, by in counts.items()})
        self._totals = totals
        self._changed = {numbers[number] for number in self._changed}
        self._news = {numbers[number] for number in self._news}
        self._told = {(numbers.get(number, number), kind): told for (number, kind), told in self._told.items()}
        self._entries = [
            entry if entry.drive is None else replace(entry, drive=numbers.get(entry.drive, entry.drive))
            for entry in self._entries
        ]
        if any(before != now for before, now in numbers.items()):
            # Names and troubles under way are those of other drives now; a trouble that goes on is heard again.
            self._names, self._named_at, self._gathered = {}, float("-inf"), Gathered()

    def _follow(self) -> None:
        try:
            self._listen()
        except DiskwatchError as error:
            self.trouble = str(error)
        except Exception as error:  # noqa: BLE001  # a thread that dies in silence would look like a quiet kernel
            self.trouble = f"Listening to the kernel's log ended: {type(error).__name__}: {plain(str(error))}"

    def _listen(self) -> None:
        """Wait, read, judge, keep."""
        poll = select.poll()
        poll.register(self._wake[0], select.POLLIN)
        if self._log is not None and self._log.live:
            poll.register(self._log.fileno(), select.POLLIN)
        while not any(end == self._wake[0] for end, _ in poll.poll(self._patience())):
            if not self._blocks():
                # Before the first round no name means anything; the kernel keeps its lines meanwhile.
                if any(end == self._wake[0] for end, _ in _only(self._wake[0]).poll(500)):
                    return
                continue
            while self._hear():
                self._keep_now_and_then()
            self._take(settle(self._gathered, self._clock()))
            self._tell_of_more()
            self._keep_now_and_then()

    def _patience(self) -> float | None:
        """Milliseconds until something is to be done without a line; None for never."""
        waits = []
        if self._log is not None and not self._log.live:
            waits.append(FILE_EVERY)
        if self._gathered.troubles:
            waits.append(QUIET / 3)
        if self._entries or self._changed:
            waits.append(KEEP_EVERY)
        if any(count > MOST_TOLD for _, count in self._told.values()):
            waits.append(_HOUR / 4)
        return min(waits) * 1000 if waits else None

    def _clock(self) -> float:
        """Now, in the log's own time; of a file only how long ago its last line came in is known."""
        up = self._senses.uptime()
        return up if self._log is not None and self._log.live else self._line + up - self._spoke

    def _hear(self) -> bool:
        """Take in what the log has; whether there was anything."""
        lines = () if self._log is None else self._log.read()
        if not lines:
            return False
        self._name_drives()
        for line in lines:
            found = hear(self._gathered, line, self._names)
            if found:
                self._take(found)
        self._spoke, self._line = self._senses.uptime(), lines[-1].seconds
        return True

    def _name_drives(self) -> None:
        if self._epoch != self._keeper.epoch:
            with self._lock:
                self._begin_anew_if_void()
        up = self._senses.uptime()
        if up - self._named_at < RENAMED_EVERY:
            return
        self._named_at = up
        drives = {str(number): blocks for number, blocks in self._blocks().items()}
        # The last word about a drive often comes when sysfs has forgotten it: names last till others take them.
        self._names = {**self._names, **self._senses.names(drives)}

    def _take(self, found: Found) -> None:
        for drive, event in found:
            number, at = int(drive), self._when(event)
            totals = self._totals.setdefault(number, {})
            for signal in _COUNTS[event.kind]:
                totals[signal] = totals.get(signal, 0) + 1
            if event.kind is EventKind.UNREADABLE and event.sector is not None:
                totals[_LAST] = event.sector
            self._changed.add(number)
            self._tell(number, event, at)

    def _when(self, event: Event) -> int:
        """When it happened by the clock on the wall; of a file only when it was heard."""
        if self._log is None or not self._log.live:
            return self._now()
        return self._now() - round(max(0.0, self._senses.uptime() - event.seconds))

    def _tell(self, number: int, event: Event, at: int) -> None:
        key = number, event.kind
        hour, count = self._told.get(key, (at // _HOUR, 0))
        if at // _HOUR != hour:
            self._tell_of_more(key)
            hour, count = at // _HOUR, 0
        self._told[key] = hour, count + 1
        if count >= MOST_TOLD:
            return
        piece = None if event.sector is None else self._senses.piece_at(event.subject, event.sector)
        data = {
            "event": event.kind.value,
            "device": plain(event.subject),
            "sector": event.sector,
            "partition": piece.name if piece is not None else None,
            "partition_sector": piece.sector if piece is not None else None,
            "medium": event.medium,
            "words": plain(event.words),
            "lines": event.lines,
        }
        text = (
            heard_told.happened(event)
            if piece is None
            else heard_told.happened(event, piece.name, piece.sector)
        )
        self._entries.append(Entry(at=at, drive=number, kind="kernel", text=text, data=data))

    def _tell_of_more(self, only: tuple[int, EventKind] | None = None, *, at_end: bool = False) -> None:
        """Say how many events were not told one by one, once their hour is over."""
        now = self._now()
        for key in [only] if only is not None else list(self._told):
            hour, count = self._told.get(key, (0, 0))
            if only is None and not at_end and hour == now // _HOUR:
                continue
            self._told.pop(key, None)
            if count > MOST_TOLD:
                more = count - MOST_TOLD
                data = {"event": key[1].value, "more": more}
                text = heard_told.more(more)
                self._entries.append(Entry(at=now, drive=key[0], kind="kernel", text=text, data=data))

    def _keep_now_and_then(self) -> None:
        if (self._entries or self._changed) and self._senses.uptime() - self._kept_at >= KEEP_EVERY:
            self._keep()
            self._soon()

    def _keep(self) -> None:
        if self._log is None or self._log.left_off.sequence < 0:
            return
        self._kept_at = self._senses.uptime()
        if self._log.lost > self._lost:
            text = heard_told.lost(self._log.lost - self._lost)
            self._entries.append(Entry(at=self._now(), drive=None, kind="trouble", text=text))
            self._lost = self._log.lost
        with self._lock:
            self._begin_anew_if_void()
            entries, self._entries = tuple(self._entries), []
            changed, self._changed = self._changed, set()
            self._kept.update((number, dict(self._totals[number])) for number in changed)
            self._news |= changed
            self._keeper.listen(
                Listened(
                    source=self._senses.source,
                    left_off=self._log.left_off,
                    gathered=msgspec.json.encode(self._gathered).decode(),
                    totals={number: self._kept[number] for number in changed},
                    entries=entries,
                )
            )


def _beyond(counts: Mapping[str, int], kept: Mapping[str, int]) -> dict[str, int]:
    """What was heard and is not kept yet: counts on top of what is; of the last sector the sector itself."""
    return {name: count if name == _LAST else count - kept.get(name, 0) for name, count in counts.items()}


def _only(end: int) -> select.poll:
    poll = select.poll()
    poll.register(end, select.POLLIN)
    return poll
