"""Between the watch and its history: what is judged is kept, and where it cannot be, watching goes on.

A full disk, a read-only mount or a vanished folder must not silence a warning. What could not be written waits
here, bounded, and is written when the trouble is over; what the trouble is can be asked at any time.
"""

from collections import deque
from collections.abc import Callable, Sequence
from contextlib import suppress
from dataclasses import replace
from pathlib import Path
from typing import TypeVar

from diskwatch.errors import (
    DiskwatchError,
    HistoryDamaged,
    HistoryError,
    HistoryHeld,
    HistoryTooNew,
    NothingToWorkOn,
)
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.places import HISTORY
from diskwatch.records import (
    Drive,
    DriveLine,
    Entry,
    IoSpan,
    KnownDrive,
    LeftOff,
    Listened,
    Place,
    Round,
)

MOST_WAITING = 2_000
"""Writes that wait at most; half-hourly rounds of a whole month fit."""

_Answer = TypeVar("_Answer")


class Keeper:
    """Keeps rounds, traffic and entries; never raises for want of a place to keep them.

    One thread at a time may use it; the service gives it a lock of its own.
    """

    def __init__(self, folder: Path) -> None:
        """Open the history, or go on without it.

        Raises:
            HistoryTooNew: the file was written by a newer version and must be left alone.
            HistoryHeld: another process writes it.
        """
        self._folder = folder
        self._history: History | None = None
        self._waiting: deque[Callable[[History], None]] = deque(maxlen=MOST_WAITING)
        self._trouble: str | None = None
        self._damaged = False
        self._away = False
        self._closed = False
        self._blind = False
        self.epoch = 0
        """Grows when a history comes into reach whose past was not known: what was remembered is void then."""
        self._known: dict[int, KnownDrive] = {}
        self._states: dict[int, str] = {}
        try:
            self._take_up(History.open(folder))
        except (HistoryTooNew, HistoryHeld):
            raise
        except HistoryError as error:
            self._trouble = str(error)
            self._damaged = isinstance(error, HistoryDamaged)
            self._remember_what_can_be_read()

    def _take_up(self, history: History) -> None:
        self._history = history
        known = {one.number: one for one in history.known()}
        if self._blind and known:
            # Numbers and states were begun anew without this past, which is worth more than what waits.
            lost, at = len(self._waiting), max((one.first_seen for one in self._known.values()), default=0)
            self._waiting.clear()
            self._known, self._states, self.epoch = {}, {}, self.epoch + 1
            text = (
                f"The history came into reach late; {lost} writes from before that were given up for its past."
            )
            history.note(Entry(at=at, drive=None, kind="trouble", text=text))
        self._blind = False
        self._known = known | self._known
        self._states = dict(history.states()) | self._states

    def _remember_what_can_be_read(self) -> None:
        """A history that cannot be written may still be read: its past is what a judgement rests on."""
        try:
            with Past.open(self._folder) as past:
                self._known = {line.number: _known(line) for line in past.bays(0).every}
                self._states = {number: text for number in self._known if (text := past.state(number))}
        except (NothingToWorkOn, HistoryError):
            self._blind = True

    @property
    def trouble(self) -> str | None:
        """What keeps the history from being written, one sentence; None where nothing does."""
        return self._trouble

    @property
    def damaged(self) -> bool:
        """Whether what keeps it from being written is damage to its file."""
        return self._damaged

    @property
    def waiting(self) -> int:
        """Writes that wait for the trouble to end."""
        return len(self._waiting)

    @property
    def known(self) -> tuple[KnownDrive, ...]:
        """All drives that are known."""
        return tuple(self._known.values())

    def state(self, number: int) -> str | None:
        """A drive's analyser state as last kept, or None."""
        return self._states.get(number)

    def admit(self, drive: Drive, place: Place, at: int) -> KnownDrive:
        """Take in a drive that was never seen before; its number is never another's."""
        known = KnownDrive(number=max(self._known, default=0) + 1, drive=drive, place=place, first_seen=at)
        self._known[known.number] = known
        return known

    def record(self, finished: Round) -> None:
        """Keep a round: all of it or, while the history cannot be written, later."""
        for one in finished.drives:
            self._known[one.known.number] = one.known
            if one.state is not None:
                self._states[one.known.number] = one.state
        # Answers in full would fill the memory while the history is out of reach: they are worth no waiting.
        kept = finished if self._history is not None and not self._waiting else _without_answers(finished)
        self._write(lambda history: history.record(kept))

    def add_traffic(self, spans: Sequence[IoSpan]) -> None:
        """Keep traffic."""
        if spans:
            self._write(lambda history: history.add_traffic(spans))

    def listen(self, listened: Listened) -> None:
        """Keep what was heard in the kernel's log."""
        self._write(lambda history: history.listen(listened))

    def left_off(self, source: str) -> tuple[LeftOff, str] | None:
        """How far a log was read, and what was gathered of troubles under way; None where that is not known."""
        with suppress(HistoryError):
            return self.ask(lambda history: history.left_off(source))
        return None

    def heard_totals(self) -> dict[int, dict[str, int]]:
        """What is counted of each drive besides its own word; nothing where no history is in reach."""
        with suppress(HistoryError):
            return self.ask(lambda history: history.heard_totals()) or {}
        return {}

    def note(self, *entries: Entry) -> None:
        """Keep day-book entries that belong to no round."""
        if entries:
            self._write(lambda history: history.note(*entries))

    def ask(self, question: Callable[[History], _Answer]) -> _Answer | None:
        """Ask the history something, or let it do something that need not be done now.

        Returns:
            Its answer; None where there is no history in reach.

        Raises:
            HistoryDamaged: its file is damaged.
            HistoryError: it could not answer for another reason.
        """
        return None if self._history is None else question(self._history)

    def change(self, deed: Callable[[History], _Answer]) -> _Answer:
        """Let the owner change the past: what was remembered of it is void afterwards.

        Raises:
            HistoryError: there is no history in reach, or it cannot be written.
        """
        self.try_again()
        if self._history is None or self._waiting:
            raise HistoryError(f"the history cannot be written now: {self._trouble}")
        answer = deed(self._history)
        self._known = {one.number: one for one in self._history.known()}
        self._states = dict(self._history.states())
        self.epoch += 1
        return answer

    def let_go(self, trouble: str) -> None:
        """Let go of the file until `come_back`, so that it can be mended; all waits, this is the trouble."""
        self._trouble = trouble
        self._away = True
        if self._history is not None:
            with suppress(DiskwatchError):
                self._history.close()
            self._history = None

    def come_back(self) -> None:
        """Take up the history again that was let go, and write what waits."""
        self._away = False
        self._flush()

    def try_again(self) -> None:
        """Write what waits, if it can be written now."""
        if self._waiting or self._history is None:
            self._flush()

    def close(self) -> None:
        """Write what waits, if it can be written now, and let go of the file; later deeds are dropped."""
        self.try_again()
        self._closed = True
        if self._history is not None:
            self._history.close()
            self._history = None

    def _write(self, deed: Callable[[History], None]) -> None:
        if self._closed:
            return
        self._waiting.append(deed)
        self._flush()

    def _flush(self) -> None:
        if self._away:
            return
        try:
            if self._history is None:
                self._take_up(History.open(self._folder))
            while self._history is not None and self._waiting:
                self._first_of_those_waiting(self._history)
            self._trouble = None
            self._damaged = False
        except DiskwatchError as error:
            self._trouble = str(error)
            self._damaged = isinstance(error, HistoryDamaged)
            if self._history is not None and not (self._folder / HISTORY).exists():
                # The file was taken away under the watch: begin a new one at the next try.
                self._history.close()
                self._history = None

    def _first_of_those_waiting(self, history: History) -> None:
        deed = self._waiting[0]
        try:
            deed(history)
        except DiskwatchError:
            raise
        except Exception:
            # A fault of our own, not of the disk: it must not stand in the way of all that follows.
            self._waiting.popleft()
            raise
        self._waiting.popleft()


def _without_answers(finished: Round) -> Round:
    return replace(
        finished,
        drives=tuple(replace(one, pass_=replace(one.pass_, answer=None)) for one in finished.drives),
    )


def _known(line: DriveLine) -> KnownDrive:
    return KnownDrive(number=line.number, drive=line.drive, place=line.place, first_seen=line.first_seen)
