"""When what is done: the jobs, and what becomes of one that fails or comes late.

APScheduler keeps a failing job's exception to itself and goes on; a listener turns it into an entry of the day
book, since a watch that has stopped working must not look like one that works.

Its next times lie on the wall clock, which people set. So it is remembered, by a clock that nobody sets and
that runs on in sleep, when each job began last: after the clock was set every job keeps its pace, and a turn
that comes too early because of it is left out.
"""

import logging
import time
from collections.abc import Callable
from contextlib import suppress
from datetime import UTC, datetime, timedelta
from typing import Any

from diskwatch.service.library import (
    EVENT_JOB_ERROR,
    EVENT_JOB_MAX_INSTANCES,
    BackgroundScheduler,
    BaseExecutor,
    BaseScheduler,
    DateTrigger,
    IntervalTrigger,
    JobLookupError,
    ThreadPoolExecutor,
)

Mishap = Callable[[str], None]

EARLY = 0.1
"""Part of its interval by which a job may begin early: the time of day that it was planned for is not exact."""

# What goes wrong is told through the listener below, in our words; the library's own lines, with tracebacks,
# would otherwise reach standard error.
logging.getLogger("apscheduler").addHandler(logging.NullHandler())
logging.getLogger("apscheduler").propagate = False


def now_steady() -> float:
    """Seconds since the start of the system, sleep included; nobody sets this clock."""
    return time.clock_gettime(time.CLOCK_BOOTTIME)


def _now() -> datetime:
    return datetime.now(UTC)


def _thread() -> BaseExecutor:
    return ThreadPoolExecutor(1)


class Schedule:
    """The jobs of the watch, all by intervals in UTC."""

    def __init__(
        self,
        mishap: Mishap,
        *,
        scheduler: type[BaseScheduler] = BackgroundScheduler,
        place: Callable[[], BaseExecutor] = _thread,
        now: Callable[[], datetime] = _now,
        steady: Callable[[], float] = now_steady,
    ) -> None:
        """Begin with no jobs.

        Args:
            mishap: told in one sentence when a job failed or was still running when its next turn came.
            scheduler: what runs jobs.
            place: makes a place where jobs run, one at a time.
            now: the wall clock.
            steady: the clock that nobody sets, seconds.
        """
        self._mishap = mishap
        self._now = now
        self._steady = steady
        self._jobs: dict[str, float] = {}
        self._began: dict[str, float] = {}
        self._soon: dict[str, float] = {}
        # A place each, so that neither a round with a slow drive nor upkeep holds up the counting of traffic.
        self._scheduler = scheduler(
            timezone=UTC,
            executors={"rounds": place(), "upkeep": place(), "default": place()},
            job_defaults={"coalesce": True, "misfire_grace_time": None, "max_instances": 1},
        )
        self._scheduler.add_listener(self._failed, EVENT_JOB_ERROR | EVENT_JOB_MAX_INSTANCES)

    def every(self, name: str, seconds: float, job: Callable[[], object], *, place: str = "default") -> None:
        """Do a job now and then at an interval."""
        self._jobs[name] = seconds

        def turn() -> None:
            began = self._began.get(name)
            if began is not None and self._steady() - began < seconds * (1 - EARLY):
                self._plan(name)
                return
            self._began[name] = self._steady()
            job()

        self._scheduler.add_job(
            turn,
            IntervalTrigger(seconds=seconds, timezone=UTC),
            id=name,
            executor=place,
            next_run_time=self._now(),
        )

    def soon(self, name: str, seconds: float, job: Callable[[], object], *, place: str = "default") -> None:
        """Do a job once in a while from now, unless it waits already: whatever piles up is done in one go."""
        if self._scheduler.get_job(name) is None:
            self._soon[name] = self._steady() + seconds
            self._scheduler.add_job(
                job,
                DateTrigger(run_date=self._now() + timedelta(seconds=seconds), timezone=UTC),
                id=name,
                executor=place,
                replace_existing=True,
            )

    def start(self) -> None:
        """Begin to run jobs."""
        self._scheduler.start()

    def clock_moved(self) -> None:
        """Plan every job anew: next times lie on the clock, and one set back would let none run for as long."""
        for name in (*self._jobs, *self._soon):
            self._plan(name)

    def _plan(self, name: str) -> None:
        """Plan a job's next turn by what is left of its interval."""
        steady = self._steady()
        due = self._began.get(name, steady) + self._jobs[name] if name in self._jobs else self._soon[name]
        # One that was done, or is taken out by another thread just now, has nothing to be planned.
        with suppress(JobLookupError):
            self._scheduler.modify_job(
                name, next_run_time=self._now() + timedelta(seconds=max(0.0, due - steady))
            )

    def stop(self) -> None:
        """Run no further job; one that is running is not waited for."""
        if self._scheduler.running:
            self._scheduler.shutdown(wait=False)

    def _failed(self, event: Any) -> None:
        if event.code == EVENT_JOB_MAX_INSTANCES:
            told = "was still running when its next turn came; that turn was left out."
        else:
            error = event.exception
            told = f"failed: {type(error).__name__}: {error}; it runs again at its next turn."
        self._mishap(f"The job {event.job_id} {told}")
