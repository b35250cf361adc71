"""How many of the drives that showed this failed soon after: of others, never a forecast of this one."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Odds:
    """What became of other drives that showed the same.

    Attributes:
        condition: what they showed, a row of the table of odds.
        days: the horizon, counted from the day on which it first showed.
        share: the share of them that failed within it, 0 to 1; None where only an upper bound may be said.
        low: lower end of its interval; None where only an upper bound may be said.
        high: upper end of its interval.
        level: how often such an interval holds the share in that fleet, 0 to 1.
        drives: how many showed it.
        failed: how many of these failed within the horizon.
        source: where the figures come from, and by which method.
        since_day: UTC day number on which this drive first showed it.
    """

    condition: str
    days: int
    share: float | None
    low: float | None
    high: float
    level: float
    drives: int
    failed: int
    source: str
    since_day: int
