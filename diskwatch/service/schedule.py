"""When what is done: the jobs, and what becomes of one that fails or comes late.

APScheduler keeps a failing job's exception to itself and goes on; a listener turns it into an entry of the day
book, since a watch that has stopped working must not look like one that works.
"""

import logging
from collections.abc import Callable
from datetime import UTC, datetime, timedelta
from typing import Any

from apscheduler.events import EVENT_JOB_ERROR, EVENT_JOB_MAX_INSTANCES
from apscheduler.executors.pool import ThreadPoolExecutor
from apscheduler.schedulers.background import BackgroundScheduler
from apscheduler.triggers.date import DateTrigger
from apscheduler.triggers.interval import IntervalTrigger

Mishap = Callable[[str], None]

# What goes wrong is told through the listener below, in our words; the library's own lines, with tracebacks,
# would otherwise reach standard error.
logging.getLogger("apscheduler").addHandler(logging.NullHandler())
logging.getLogger("apscheduler").propagate = False


class Schedule:
    """The jobs of the watch, all by intervals in UTC."""

    def __init__(self, mishap: Mishap) -> None:
        """Begin with no jobs.

        Args:
            mishap: told in one sentence when a job failed or was still running when its next turn came.
        """
        self._mishap = mishap
        self._jobs: dict[str, float] = {}
        # A place each, so that neither a round with a slow drive nor upkeep holds up the counting of traffic.
        self._scheduler = BackgroundScheduler(
            timezone=UTC,
            executors={
                "rounds": ThreadPoolExecutor(1),
                "upkeep": ThreadPoolExecutor(1),
                "default": ThreadPoolExecutor(1),
            },
            job_defaults={"coalesce": True, "misfire_grace_time": None, "max_instances": 1},
        )
        self._scheduler.add_listener(self._failed, EVENT_JOB_ERROR | EVENT_JOB_MAX_INSTANCES)

    def every(self, name: str, seconds: float, job: Callable[[], object], *, place: str = "default") -> None:
        """Do a job now and then at an interval."""
        self._jobs[name] = seconds
        self._scheduler.add_job(
            job,
            IntervalTrigger(seconds=seconds, timezone=UTC),
            id=name,
            executor=place,
            next_run_time=datetime.now(UTC),
        )

    def soon(self, name: str, seconds: float, job: Callable[[], object], *, place: str = "default") -> None:
        """Do a job once in a while from now, unless it waits already: whatever piles up is done in one go."""
        if self._scheduler.get_job(name) is None:
            self._scheduler.add_job(
                job,
                DateTrigger(run_date=datetime.now(UTC) + timedelta(seconds=seconds), timezone=UTC),
                id=name,
                executor=place,
                replace_existing=True,
            )

    def start(self) -> None:
        """Begin to run jobs."""
        self._scheduler.start()

    def clock_moved(self) -> None:
        """Plan every job anew: next times lie on the clock, and one set back would let none run for as long."""
        for name, seconds in self._jobs.items():
            self._scheduler.reschedule_job(name, trigger=IntervalTrigger(seconds=seconds, timezone=UTC))

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
