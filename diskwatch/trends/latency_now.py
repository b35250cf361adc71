"""What one direction of a drive's latency has come to: small enough to be carried from pass to pass.

All that it was learnt from (`diskwatch.trends.latency`) is large and moves once a day, so it is kept apart.
"""

from dataclasses import dataclass
from math import exp, log

from diskwatch.records import Direction
from diskwatch.trends import latency_forecast
from diskwatch.trends.coupling import coupling
from diskwatch.trends.interval import Interval
from diskwatch.trends.latency import Latency
from diskwatch.trends.middle import median
from diskwatch.trends.slowness import LEARNING, Slowness, threshold

LATEST = 7
"""Scored days whose median is the present pace: about what an alarm takes."""

SIGNALS = {Direction.READ: "read-latency", Direction.WRITE: "write-latency"}
"""What each direction is called among a drive's signals."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LatencyNow:
    """One direction of a drive's latency now.

    Attributes:
        evidence: M in days of watching; None while the usual times are being learnt.
        scored: days scored so far.
        classes: classes of work of which the usual time is known.
        usual_us: what operations usually take, microseconds, the geometric mean over these classes; None
            without any.
        shift: natural logarithm of how many times as long comparable work took over the latest scored days;
            None before the first.
        tolerance: slowness that still counts as sound, likewise.
        onset: UTC day number since which evidence has gathered; None where there is none now.
        follows_heat: whether slowness follows the drive's temperature; None where that cannot be told.
        twice: when work will take twice as long as usual; None without an alarm.
        seen_on: UTC day number of the latest scored day; None before the first.
        noted: whether the owner has taken note of an alarm, which the next day of traffic takes up.
    """

    evidence: float | None
    scored: int
    classes: int
    usual_us: int | None
    shift: float | None
    tolerance: float
    onset: int | None
    follows_heat: bool | None
    twice: Interval | None
    seen_on: int | None
    noted: bool = False

    @property
    def times(self) -> float | None:
        """How many times as long comparable work takes now; None before the first scored day."""
        return None if self.shift is None else exp(self.shift)

    @property
    def now_us(self) -> int | None:
        """What operations take now at equal load, microseconds; None before the first scored day."""
        return None if self.usual_us is None or self.shift is None else round(self.usual_us * exp(self.shift))

    @property
    def missing(self) -> int:
        """Scored days that are still needed before there is any evidence."""
        return max(0, LEARNING - self.scored)


def latency_now(latency: Latency, direction: Direction) -> LatencyNow:
    """Sum up one direction."""
    slowness = latency.of(direction)
    levels = [one.level for one in slowness.references.values() if one.level is not None]
    latest = [one.shift for one in slowness.recent[-LATEST:] if one.shift is not None]
    coupled = coupling(slowness.recent)
    return LatencyNow(
        evidence=slowness.evidence,
        scored=slowness.scored,
        classes=len(levels),
        usual_us=round(1000 * exp(sum(levels) / len(levels))) if levels else None,
        shift=median(latest) if latest else None,
        tolerance=slowness.tolerance,
        onset=slowness.onset,
        follows_heat=None if coupled.correlation is None else coupled.heat,
        twice=_twice(slowness) if alarmed(slowness, direction) else None,
        seen_on=slowness.recent[-1].day if slowness.recent else None,
    )


def alarmed(slowness: Slowness, direction: Direction) -> bool:
    """Whether the evidence has reached the threshold of its direction."""
    return (slowness.evidence or 0.0) >= threshold(direction)


def _twice(slowness: Slowness) -> Interval:
    since = [
        (float(one.day), one.shift)
        for one in slowness.recent
        if one.shift is not None and slowness.onset is not None and one.day >= slowness.onset
    ]
    return latency_forecast.forecast([day for day, _ in since], [shift for _, shift in since], limit=log(2))
