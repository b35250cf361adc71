"""What all screens share: the clock, what is known, the one asking thread, a word to the reader."""

import asyncio
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

from rich.text import Text

from diskwatch.dashboard.cells import cut, fit
from diskwatch.dashboard.feed import Snapshot
from diskwatch.dashboard.head import notes, tells_trouble, top_line, troubles
from diskwatch.dashboard.questions import Questions, Stage, Strand
from diskwatch.dashboard.weight import Face
from diskwatch.errors import DiskwatchError
from diskwatch.records import DriveLine
from diskwatch.units import plain

_Answer = TypeVar("_Answer")
_REPLY_STANDS = 6.0
_ROWS_A_NOTE = 8


class Desk:
    """One for the application; every screen is given it."""

    def __init__(
        self,
        now: Callable[[], int],
        *,
        questions: Questions | None,
        watching: str,
        every: int,
        face: Face,
        steady: Callable[[], float] = time.monotonic,
        stage: Stage | None = None,
    ) -> None:
        """Take what the screens stand on.

        Args:
            now: the clock, UTC seconds since 1970.
            questions: who answers what goes beyond the list of drives; None where nobody does.
            watching: how the dashboard was opened, one harmless sentence.
            every: seconds between two passes.
            face: what the terminal can show.
            steady: seconds that pass for the reader, whatever the clock does.
            stage: the rehearsal that is shown; None where the drives are real.
        """
        self.now = now
        self.questions = questions
        self.watching = watching
        self.every = every
        self.face = face
        self.steady = steady
        self.stage = stage
        self.snapshot: Snapshot | None = None
        self.asked_at: float | None = None
        # One thread, so that a source may hold a connection that belongs to a thread.
        self.asker = ThreadPoolExecutor(max_workers=1, thread_name_prefix="dashboard-feed")
        self._said: str | None = None
        self._said_until = 0.0

    async def ask(self, question: Callable[[], _Answer]) -> _Answer:
        """Let the asking thread find an answer.

        Raises:
            DiskwatchError: there is none; says why.
        """
        try:
            return await asyncio.get_running_loop().run_in_executor(self.asker, question)
        except DiskwatchError:
            raise
        except Exception as error:  # a screen that stands open for weeks says a fault and goes on
            raise DiskwatchError(
                f"diskwatch has a fault of its own: {type(error).__name__}: {error}", hint="the rest goes on"
            ) from error

    def lines(self) -> tuple[DriveLine, ...]:
        """All drives as last known, worst call first."""
        bays = self.snapshot.bays if self.snapshot is not None else None
        return () if bays is None else bays.drives

    def line(self, number: int) -> DriveLine | None:
        """One of them, by its number in the history."""
        bays = self.snapshot.bays if self.snapshot is not None else None
        return next((one for one in bays.every if one.number == number), None) if bays is not None else None

    def strand(self, number: int) -> Strand | None:
        """A drive's line through time; None before it is known."""
        return None if self.snapshot is None else self.snapshot.strands.get(number)

    def say(self, text: str) -> None:
        """A harmless sentence to the reader, in the last line for some seconds."""
        self._said, self._said_until = text, self.steady() + _REPLY_STANDS

    def said(self, width: int) -> Text | None:
        """What was said last, as long as it stands."""
        if self._said is None or self.steady() >= self._said_until:
            return None
        return Text(cut(self._said, width, self.face.mark))

    def over(self, keys: tuple[Text, ...], width: int) -> tuple[Text, ...]:
        """The last lines of a screen: its keys; what was said stands in the place of the last of them."""
        said = self.said(width)
        return keys if said is None else (*keys[:-1], said)

    def troubles(self) -> tuple[str, ...]:
        """What is wrong with the screen or the watch now."""
        waited = int(self.steady() - self.asked_at) if self.asked_at is not None else 0
        return troubles(self.snapshot, self.now(), self.every, waited=waited)

    def banner(self, width: int) -> tuple[Text, ...]:
        """Above everything, on every screen, that all is invented; nothing where the drives are real."""
        if self.stage is None:
            return ()
        told = cut(f" {plain(self.stage.banner())}", width - 12, self.face.mark)
        return (fit(Text.assemble((" INVENTED ", "bold reverse"), told), width),)

    def top(self, width: int) -> tuple[Text, ...]:
        """The first line of every screen."""
        return (top_line(self.snapshot, self.watching, self.now(), width, self.every),)

    def notes(self, width: int, height: int) -> tuple[Text, ...]:
        """The troubles below it, as many as a screen of this height has room for."""
        if self.snapshot is not None and tells_trouble(self.snapshot):
            return ()
        return notes(self.troubles(), width, self.face, most=max(height // _ROWS_A_NOTE, 1))
