"""Years of a machine's clocks in seconds: a schedule that runs by a clock of the test's own.

The real scheduler decides what is due; only its clock, its waiting and its threads are the test's. Time passes
by what it asks to wait for; in between the machine sleeps, and its wall clock is set.
"""

from datetime import UTC, datetime

from apscheduler.executors.debug import DebugExecutor
from apscheduler.schedulers.base import BaseScheduler

from diskwatch.service.clocks import ClockGuard, Clocks
from diskwatch.service.schedule import Schedule
from diskwatch.service.watch import GUARD

BEGAN = datetime(2026, 1, 1, tzinfo=UTC).timestamp()


class Stepped(BaseScheduler):  # type: ignore[misc]  # the library has no types
    """The library's scheduler without a thread of its own."""

    def shutdown(self, wait=True):
        raise NotImplementedError("a step is all that runs")

    def wakeup(self):
        """The next step looks anyhow."""

    def step(self):
        """Run what is due; gives the seconds until something is."""
        return self._process_jobs()


class World:
    """A machine's clocks, its schedule and its guard."""

    def __init__(self, monkeypatch):
        self.wall, self.steady, self.awake = BEGAN, 0.0, 0.0
        self.runs: dict[str, list[float]] = {}
        world = self

        class Now(datetime):
            @classmethod
            def now(cls, tz=None):
                return datetime.fromtimestamp(world.wall, tz)

        monkeypatch.setattr("apscheduler.schedulers.base.datetime", Now)
        self.mishaps: list[str] = []
        self.schedule = Schedule(
            self.mishaps.append,
            scheduler=Stepped,
            place=DebugExecutor,
            now=lambda: datetime.fromtimestamp(self.wall, UTC),
            steady=lambda: self.steady,
        )
        self._guard = ClockGuard(lambda: Clocks(wall=self.wall, steady=self.steady, awake=self.awake))
        self._looked = 0.0

    def every(self, name, seconds):
        self.runs[name] = []
        self.schedule.every(name, seconds, lambda: self.runs[name].append(self.steady))

    def start(self):
        self.schedule.start()

    def pass_(self, seconds):
        """Let the machine be awake for so long."""
        until = self.awake + seconds
        while self.awake < until:
            wait = self.schedule._scheduler.step()
            # The guard's looks are taken one by one only as long as they may have something to find.
            watched = self._guard._last.wall - self._guard._last.steady != self.wall - self.steady or (
                self._guard._last.steady - self._guard._last.awake != self.steady - self.awake
            )
            step = min(until - self.awake, wait if wait is not None else seconds)
            if watched:
                step = min(step, self._looked + GUARD - self.awake)
            step = max(step, 0.0)
            self.wall, self.steady, self.awake = self.wall + step, self.steady + step, self.awake + step
            if self.awake >= self._looked + GUARD:
                self._looked = self.awake
                if self._guard.look() is not None:
                    self.schedule.clock_moved()

    def sleep(self, seconds):
        """Suspend the machine."""
        self.wall += seconds
        self.steady += seconds

    def set_clock(self, by):
        """Set the wall clock."""
        self.wall += by
