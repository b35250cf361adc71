"""The one door to APScheduler.

Of asyncio it takes one word that it never needs here, and with that a loop, streams and the whole of TLS:
several megabytes for as long as the watch lives.
"""

import inspect

from diskwatch.stand_in import without

without("apscheduler.util", "asyncio", {"iscoroutinefunction": inspect.iscoroutinefunction})

from apscheduler.events import EVENT_JOB_ERROR, EVENT_JOB_MAX_INSTANCES  # noqa: E402 - what stands above comes first
from apscheduler.executors.base import BaseExecutor  # noqa: E402 - as above
from apscheduler.executors.pool import ThreadPoolExecutor  # noqa: E402 - as above
from apscheduler.jobstores.base import JobLookupError  # noqa: E402 - as above
from apscheduler.schedulers.background import BackgroundScheduler  # noqa: E402 - as above
from apscheduler.schedulers.base import BaseScheduler  # noqa: E402 - as above
from apscheduler.triggers.date import DateTrigger  # noqa: E402 - as above
from apscheduler.triggers.interval import IntervalTrigger  # noqa: E402 - as above

__all__ = [
    "EVENT_JOB_ERROR",
    "EVENT_JOB_MAX_INSTANCES",
    "BackgroundScheduler",
    "BaseExecutor",
    "BaseScheduler",
    "DateTrigger",
    "IntervalTrigger",
    "JobLookupError",
    "ThreadPoolExecutor",
]
