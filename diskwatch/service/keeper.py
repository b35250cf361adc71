"""Between the watch and its history: what is judged is kept, and where it cannot be, watching goes on.

A full disk, a read-only mount or a vanished folder must not silence a warning. What could not be written waits
here, bounded, and is written when the trouble is over; what the trouble is can be asked at any time.
"""

import time
from collections.abc import Callable, Mapping, Sequence
from contextlib import suppress
from pathlib import Path
from typing import TypeVar

from diskwatch.errors import (
    DiskwatchError,
    HistoryDamaged,
    HistoryError,
    HistoryGarbled,
    HistoryGone,
    HistoryHeld,
    HistoryTooNew,
    HistoryUnfit,
    NothingToWorkOn,
)
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.language import _, ngettext
from diskwatch.records import (
    Drive,
    DriveLine,
    DriveRound,
    Entry,
    IoSpan,
    KnownDrive,
    LeftOff,
    Listened,
    Place,
    Round,
)
from diskwatch.service.arrival import refuse_no_state, reworked, thought_of
from diskwatch.service.joining import join, strangers
from diskwatch.service.waiting import MOST_WAITING, Notes, Traffic, Waiting, Write, called, store
from diskwatch.units import plain, say_count

_Answer = TypeVar("_Answer")


class Keeper:
    """Keeps rounds, traffic and entries; never raises for want of a place to keep them.

    One thread at a time may use it; the service gives it a lock of its own.
    """

    def __init__(self, folder: Path, *, now: Callable[[], int] = lambda: int(time.time())) -> None:
        """Open the history, or go on without it.

        Args:
            folder: where it lies.
            now: UTC seconds since 1970, for what is said of the history itself.

        Raises:
            HistoryTooNew: the file was written by a newer version and must be left alone.
            HistoryHeld: another process writes it.
        """
        self._folder = folder
        self._now = now
        self._history: History | None = None
        self._waiting = Waiting(MOST_WAITING)
        self._trouble: str | None = None
        self._damaged = False
        self._away = False
        self._closed = False
        self._blind = False
        self.epoch = 0
        """Grows when a history comes into reach whose past was not known: what was remembered is void then."""
        self._renumbered: list[Mapping[int, int]] = []
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
        """Go on with a history; where its past cannot be read, it is let go of again and nothing is written."""
        try:
            history.mend(reworked, refuse_no_state, self._now(), thorough=False)
            self._join(history)
        except BaseException:
            with suppress(DiskwatchError):
                history.close()
            raise
        self._history = history

    def _join(self, history: History) -> None:
        known = {one.number: one for one in history.known()}
        if known and (self._blind or strangers(known, self._known)):
            joined = join(history, self._known, self._waiting)
            self._waiting.become(joined.writes)
            self._known, self._states = dict(joined.known), dict(joined.states)
            self._begin_epoch(joined.numbers)
            if joined.writes:
                self._say(
                    ngettext(
                        "The history came into reach late; {count} write that waited was joined to its past.",
                        "The history came into reach late; {count} writes that waited were joined to its past.",
                        len(joined.writes),
                    ),
                    len(joined.writes),
                )
        else:
            if not known and self._known and not self._blind:
                history.take_up(self._standing())
                self._say(
                    ngettext(
                        "The history that was written before is no longer there, and a new one was begun;"
                        " what is thought of {count} drive goes on, without its past.",
                        "The history that was written before is no longer there, and a new one was begun;"
                        " what is thought of {count} drives goes on, without their past.",
                        len(self._known),
                    ),
                    len(self._known),
                )
            self._known = known | self._known
            self._states = history.states() | self._states
        self._blind = False

    def _begin_epoch(self, numbers: Mapping[int, int]) -> None:
        self._renumbered.append(numbers)
        self.epoch += 1

    def called_now(self, number: int, *, since: int) -> int:
        """The number that a drive has now.

        Args:
            number: the one that it had.
            since: in which epoch it had that.
        """
        for numbers in self._renumbered[since:]:
            number = numbers.get(number, number)
        return number

    def _say(self, text: str, count: int) -> None:
        said = plain(text.format(count=say_count(count)))
        self._waiting.append(Notes(entries=(Entry(at=self._now(), drive=None, kind="trouble", text=said),)))

    def _standing(self) -> tuple[DriveRound, ...]:
        """What is thought of each drive, for a history that does not know it."""
        return tuple(thought_of(known, self._states.get(number)) for number, known in self._known.items())

    def _remember_what_can_be_read(self) -> None:
        """A history that cannot be written may still be read: its past is what a judgement rests on."""
        try:
            with Past.open(self._folder) as past:
                self._known = {line.number: _known(line) for line in past.bays(0).every}
                for number in self._known:
                    # Of a state that cannot be read nothing is known; the others are none the worse for it.
                    with suppress(HistoryGarbled):
                        text = past.state(number)
                        self._states |= {} if text is None else {number: text}
        except (NothingToWorkOn, HistoryError):
            self._blind = True

    @property
    def trouble(self) -> str | None:
        """What keeps the history from being written, one sentence; None where nothing does."""
        return None if self._trouble is None else f"{self._trouble}{self._waiting.told()}"

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
        self._write(finished)

    def add_traffic(self, spans: Sequence[IoSpan]) -> None:
        """Keep traffic."""
        if spans:
            self._write(Traffic(spans=tuple(spans)))

    def listen(self, listened: Listened) -> None:
        """Keep what was heard in the kernel's log."""
        self._write(listened)

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
            self._write(Notes(entries=entries))

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
        self._begin_epoch({})
        return answer

    def mend(self) -> None:
        """Take out of the history what cannot be right; what is remembered here goes on.

        Raises:
            HistoryError: it cannot be read or written.
        """
        if self._history is not None:
            self._history.mend(reworked, refuse_no_state, self._now(), thorough=True)

    def let_go(self, trouble: str) -> None:
        """Let go of the file until `come_back`, so that it can be mended; all waits, this is the trouble."""
        self._trouble = trouble
        self._away = True
        self._part()

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

    def _write(self, write: Write) -> None:
        if self._closed:
            return
        self._waiting.append(write)
        self._flush()
        if self._waiting:
            self._waiting.lighten()

    def _flush(self) -> None:
        if self._away:
            return
        try:
            try:
                self._store_all()
            except HistoryGone:
                # Another file stands there now, or none, or the same one again on a disk mounted anew.
                self._part()
                self._store_all()
            self._trouble = None
            self._damaged = False
        except DiskwatchError as error:
            self._trouble = str(error)
            self._damaged = isinstance(error, HistoryDamaged)

    def _part(self) -> None:
        """Let go of the file."""
        if self._history is not None:
            with suppress(DiskwatchError):
                self._history.close()
            self._history = None

    def _store_all(self) -> None:
        if self._history is None:
            self._take_up(History.open(self._folder))
        while self._history is not None and self._waiting:
            self._store_first(self._history)
        if self._waiting.given_up:
            count, self._waiting.given_up = self._waiting.given_up, 0
            self._say(
                ngettext(
                    "The history could not be written for long; the oldest {count} write was given up.",
                    "The history could not be written for long; the oldest {count} writes were given up.",
                    count,
                ),
                count,
            )
            self._store_all()

    def _store_first(self, history: History) -> None:
        write = self._waiting.first
        try:
            try:
                store(history, write)
            except HistoryUnfit:
                # It may speak of a drive that no round has written yet.
                history.take_up(self._standing())
                store(history, write)
        except HistoryUnfit as error:
            # It would fit no better later, and all that follows would wait for it for ever.
            self._waiting.done()
            text = plain(_("Left out, {what}: {why}.").format(what=called(write), why=error))
            self._waiting.append(Notes(entries=(Entry(at=self._now(), drive=None, kind="trouble", text=text),)))
        except DiskwatchError:
            raise
        except Exception:
            # A fault of our own, not of the disk: it must not stand in the way of all that follows.
            self._waiting.done()
            raise
        else:
            self._waiting.done()


def _known(line: DriveLine) -> KnownDrive:
    return KnownDrive(number=line.number, drive=line.drive, place=line.place, first_seen=line.first_seen)
