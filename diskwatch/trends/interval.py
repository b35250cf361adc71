"""What every forecast answers: an interval with its probability, or the reason why there is none.

Only intervals are shown, never a single date, and nothing is dated beyond five years: a drive that far from a
limit will more likely end by something else first (a rule of the house). An interval is a statement about one
limit, never about the drive as a whole.
"""

from dataclasses import dataclass
from datetime import UTC, datetime
from math import isfinite

from diskwatch.units import DAY

FAR = 5 * 365.25
"""Days beyond which no date is given."""

USUAL = 0.8
"""The probability of an interval, unless another is asked for: its ends are the 10 % and the 90 % value."""

_IN_DAYS = 90
"""Intervals that end within this many days are told in days, later ones in months."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """Between when and when something is to be expected, in days from the moment of the forecast.

    Attributes:
        low: the lower end in days; None where nothing can be said.
        high: the upper end in days; None where nothing can be said, or where the interval has no upper end (it
            may well never happen as things go now).
        probability: how likely the interval is to hold the outcome, by the model of its forecast.
        reason: why nothing can be said, as a part of a sentence; None where something can.
    """

    low: float | None
    high: float | None
    probability: float = USUAL
    reason: str | None = None

    def __post_init__(self) -> None:
        """Refuse what is no interval.

        Raises:
            ValueError: ends out of order or not finite, a probability outside 0 to 1, ends beside a reason.
        """
        ends = [end for end in (self.low, self.high) if end is not None]
        ordered = all(isfinite(end) for end in ends) and ends == sorted(ends)
        if not ordered or not 0 < self.probability < 1 or (self.low is None) == (self.reason is None):
            raise ValueError(f"no interval: {self.low} to {self.high}, {self.probability}, {self.reason!r}")
        if self.low is None and self.high is not None:
            raise ValueError("an interval without a lower end has no upper one either")

    @property
    def known(self) -> bool:
        """Whether there is an interval at all."""
        return self.low is not None


def unknown(reason: str, probability: float = USUAL) -> Interval:
    """No forecast, and why."""
    return Interval(low=None, high=None, probability=probability, reason=reason)


def bounded(interval: Interval) -> Interval:
    """The interval as it may be shown: an end beyond five years is not told as a date."""
    if interval.low is None or (interval.high is not None and interval.high <= FAR):
        return interval
    return Interval(low=min(interval.low, FAR), high=None, probability=interval.probability)


def words(interval: Interval, at: int) -> str:
    """The interval for a person, as a part of a sentence.

    Args:
        interval: in days from ``at``.
        at: the moment of the forecast, UTC seconds since 1970.

    Returns:
        ``in 12 to 30 days``, ``between April and December 2027``, ``between April 2027 and some time beyond 5
        years``, ``in more than 5 years``, or ``not known: `` with the reason.
    """
    if interval.low is None:
        return f"not known: {interval.reason}"
    if interval.low >= FAR:
        return "in more than 5 years"
    start = _month(at, interval.low)
    if interval.high is None or interval.high > FAR:
        return f"between {start} and some time beyond 5 years"
    if interval.high < _IN_DAYS:
        low, high = int(interval.low), max(1, round(interval.high + 0.5))
        return f"within {high} {'day' if high == 1 else 'days'}" if low == 0 else f"in {low} to {high} days"
    end = _month(at, interval.high)
    if start == end:
        return f"in {start}"
    same_year = start.rsplit(" ", 1)[1] == end.rsplit(" ", 1)[1]
    return f"between {start.rsplit(' ', 1)[0] if same_year else start} and {end}"


_MONTHS = (
    *("January", "February", "March", "April", "May", "June"),
    *("July", "August", "September", "October", "November", "December"),
)


def _month(at: int, days: float) -> str:
    # Not by strftime, whose names of months are those of the place where the program runs.
    moment = datetime.fromtimestamp(at + days * DAY, UTC)
    return f"{_MONTHS[moment.month - 1]} {moment.year}"
