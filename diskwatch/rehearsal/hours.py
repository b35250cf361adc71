"""When backups and self-tests of an invented machine begin, and whether it is ever on then."""

from diskwatch.rehearsal.clock import START
from diskwatch.rehearsal.scenario import Scenario
from diskwatch.rehearsal.workload import is_on
from diskwatch.units import DAY

_DAYS = 14
"""Two weeks show every day of the week, and steps that do not divide a day at several places of it."""


def begins(hour: int, at: int, seconds: int) -> bool:
    """Whether an hour of the day begins in a step of time.

    Args:
        hour: the hour of the day, UTC.
        at: the step's end, UTC seconds since 1970.
        seconds: how long it is.
    """
    return (at - hour * 3_600) % DAY < seconds


def begins_ever(scenario: Scenario, hour: int) -> bool:
    """Whether an hour begins in any step in which the machine is on; holidays aside."""
    step = scenario.step_minutes * 60
    end = START + min(scenario.days, _DAYS) * DAY
    return any(
        begins(hour, at + step, step) and is_on(scenario.habit, at, away=False)
        for at in range(START, end, step)
    )
