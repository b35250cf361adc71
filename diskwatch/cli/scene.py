"""A rehearsal in the dashboard: a thread lives through it while the screen reads the history that it writes."""

import contextlib
import os
import shutil
import threading
import time
from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

from diskwatch.cli.dashboard import Source, end_with_terminal, has_braille, speaks_more_than_ascii
from diskwatch.cli.pace import Pace
from diskwatch.cli.shown import Shown
from diskwatch.errors import DiskwatchError
from diskwatch.records import Bays, IoSpan
from diskwatch.rehearsal.course import Course
from diskwatch.units import DAY, plain

_PATIENCE = 10.0
"""Seconds that the thread gets to store what it has."""

Seen = Callable[[Sequence[IoSpan]], object]
"""Is told the traffic of each step, one span a drive."""

Live = Callable[[Course, Path, Pace, Seen], str | None]


class Scene:
    """What the screen shows of the rehearsal, and what its keys do."""

    def __init__(self, course: Course, pace: Pace) -> None:
        """Take the course and its pace."""
        self._course = course
        self._pace = pace
        self._spans: Sequence[IoSpan] = ()
        self.over = False
        self.trouble: str | None = None

    def banner(self) -> str:
        """What is rehearsed, how far it is, how fast it goes."""
        course = self._course
        day = f"day {int(course.clock.days())} of {course.days}"
        if self.trouble is not None:
            how = f"it ended: {self.trouble}"
        elif self.over:
            how = "it is over"
        else:
            how = self._how()
        return f"{course.scenario.title}, {day}, {how}. Every drive here is invented ({course.scenario.place})."

    def slower(self) -> str:
        """Let time pass half as fast."""
        self._pace.change(0.5)
        return f"Time: {self._how()}."

    def faster(self) -> str:
        """Let time pass twice as fast."""
        self._pace.change(2)
        return f"Time: {self._how()}."

    def halt(self) -> str:
        """Let time stand still, or go on."""
        self._pace.halt()
        return f"Time: {self._how()}."

    def step(self) -> str:
        """Let one day pass, then stand still."""
        self._pace.step()
        return "One day passes, then time stands still: n for the next, z to go on."

    def live(self, live: Live, folder: Path) -> None:
        """Live through all of it; what goes wrong is told in the banner."""
        try:
            self.trouble = live(self._course, folder, self._pace, self._see)
        except DiskwatchError as error:
            self.trouble = str(error)
        except Exception as error:  # noqa: BLE001 - a thread's fault must reach the reader, who sees the screen only
            self.trouble = f"diskwatch has a fault of its own: {type(error).__name__}: {error}"
        self.over = True

    def _see(self, spans: Sequence[IoSpan]) -> None:
        self._spans = spans

    def shown(self, bays: Bays) -> Bays:
        """The drives as a watch would show them, with the traffic of the step that was lived last.

        Once it is over nobody watches these drives any more, which is nothing to be warned of.
        """
        spans = {span.drive: span for span in self._spans}
        drives = tuple(replace(line, traffic=spans.get(line.number)) for line in bays.drives)
        return replace(bays, watcher=os.getpid(), drives=drives)

    def _how(self) -> str:
        if self._pace.halted:
            return "standing still"
        speed = self._pace.speed
        if speed is None:
            return "as fast as it goes"
        if speed < 1:
            return f"a day in {1 / speed:g} seconds"
        return f"{speed:g} {'day' if speed == 1 else 'days'} a second"


class _Invented(Shown):
    """Answers about invented drives; none of them changes anything of this user's own."""

    def put_off(self, number: int, at: int) -> str:
        """Only tells that no notice comes of a rehearsal."""
        name = plain(self.line(number, at).name)
        return f"No notice comes of a rehearsal, so there is none about {name} to put off."


def show(course: Course, folder: Path, pace: Pace, live: Live, *, kept: bool) -> str | None:
    """Open the dashboard over a rehearsal, until the reader leaves it.

    Args:
        course: what is rehearsed.
        folder: where its history lies.
        pace: how fast its time passes.
        live: lives through it; tells why the history could not be kept, or None.
        kept: whether the history stays; else it goes also where the terminal goes.

    Returns:
        Why the history could not be kept, or None.
    """
    from diskwatch.dashboard.app import Dashboard  # noqa: PLC0415 - a rehearsal without it loads in half the time

    scene = Scene(course, pace)
    thread = threading.Thread(target=scene.live, args=(live, folder), name="rehearsal", daemon=True)
    thread.start()

    def end() -> None:
        pace.end()
        thread.join(_PATIENCE)

    def leave_nothing() -> None:
        end()
        if not kept:
            shutil.rmtree(folder, ignore_errors=True)

    threading.Thread(target=end_with_terminal, args=(leave_nothing,), name="terminal", daemon=True).start()
    try:
        with contextlib.ExitStack() as stack:
            source = Source(folder, stack, starting=None)
            Dashboard(
                lambda at: scene.shown(source(at)),
                course.clock.now,
                watching="a rehearsal, in which every drive is invented",
                # Invented time may run by weeks between two looks at the screen, and nights and holidays with
                # the machine off pass in it: no pass is missing. What ends the passes stands in the banner.
                every=course.days * DAY,
                ascii_only=not speaks_more_than_ascii(),
                braille=has_braille(),
                questions=_Invented(source.past, folder, None),
                steady=time.monotonic,
                stage=scene,
            ).run()
    finally:
        end()
    return scene.trouble
