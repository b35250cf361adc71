"""When will reads take twice as long as this drive's own usual time, at equal load?

Asked only after the ledger of latency has alarmed, over the scored days since the onset. The slope is the
median one (Theil and Sen); its uncertainty the least-squares error from the residuals, widened for days that
resemble their neighbours, with Student's t for the few days there are; and the slope itself will not stay what
it is: it wanders, by about half of itself in 90 days, which is what a straight fit forgets. Ordinary least
squares hold in 30 to 38 of 100 cases where they promise 80; these intervals in about 80 where the slope wanders
so, in nearly all where it is straight. (Method: our own study; what wandering hides in the window is ours.)
"""

from collections.abc import Callable, Sequence
from functools import lru_cache
from itertools import pairwise
from math import exp, log, sqrt

from diskwatch.trends.interval import USUAL, Interval, unknown
from diskwatch.trends.middle import median
from diskwatch.trends.robust import theil_sen
from diskwatch.trends.roots import root
from diskwatch.trends.special import normal_cdf, student_quantile

TWICE = log(2)
"""Slowness that is forecast, as a natural logarithm."""

LEAST, MOST = 8, 120
"""Scored days since the onset: fewer say too little, more than the latest of these are left out."""

_CAUTION = 1.05
_WANDER = 0.57  # a half by itself; the rest makes up for what fitting a line to a wandering slope hides
# A random walk's mean over T days to come has variance T/3 against now, and the slope fitted over the n days
# behind 0.371 n; both in units of 90 days.
_WANDER_DAYS, _WINDOW_DAYS, _LONGEST_WANDER = 270.0, 242.0, 600.0
_MOST_ALIKE = 0.9
_DRAWS = 61
_LEVELS = ((-1.5, 0.2), (-0.7, 0.2), (0.0, 0.2), (0.7, 0.2), (1.5, 0.2))  # standard deviations, weights
_SOONEST, _LATEST = log(0.01), log(1e6)  # days


def forecast(
    days: Sequence[float], shifts: Sequence[float], *, limit: float = TWICE, probability: float = USUAL
) -> Interval:
    """When the shift will reach a limit, in days from the last of the days given.

    Args:
        days: those scored since the onset, in order.
        shifts: each day's shift, the natural logarithm of how many times as long comparable work took.
        limit: the shift in question, likewise.
        probability: of the interval.

    Returns:
        The interval; without an upper end where the slowing may well end by itself; without any and with the
        reason where too little was seen or nothing gets slower; 0 to 0 where the limit is reached already.

    Raises:
        ValueError: not as many days as shifts.
    """
    if len(days) != len(shifts):
        raise ValueError(f"{len(days)} days cannot have {len(shifts)} shifts")
    x, y = days[-MOST:], shifts[-MOST:]
    if len(x) < LEAST or x[0] == x[-1]:
        return unknown(f"fewer than {LEAST} days could be compared since it began", probability)
    slope = theil_sen(x, y).slope
    centre = sum(x) / len(x)
    level = median([b - slope * (a - centre) for a, b in zip(x, y, strict=True)])
    since = x[-1] - centre
    if level + slope * since >= limit:
        return Interval(low=0.0, high=0.0, probability=probability)
    residuals = [b - level - slope * (a - centre) for a, b in zip(x, y, strict=True)]
    alike = sqrt((1 + _alike(residuals)) / (1 - _alike(residuals)))
    scatter = sqrt(sum(one * one for one in residuals) / (len(x) - 2)) * alike
    error = _CAUTION * scatter / sqrt(sum((a - centre) ** 2 for a in x))
    degrees = max(3.0, len(x) / alike**2 - 2)
    waits = _waits(
        limit - level, since, [slope + error * t for t in _students(round(degrees, 1))], scatter / sqrt(len(x))
    )

    def came(log_days: float) -> float:
        return sum(weight * _came(log_days, wait, len(x)) for wait, weight in waits)

    tail = (1 - probability) / 2
    if came(_LATEST) <= tail:
        return unknown("it is not getting slower now", probability)
    ends = [_end(came, share) for share in (tail, 1 - tail)]
    return Interval(low=ends[0], high=ends[1], probability=probability)


def _waits(
    missing: float, since: float, slopes: Sequence[float], error: float
) -> tuple[tuple[float, float], ...]:
    """Days until the limit for each slope and level that may be, with weights; slopes that fall are left out.

    Args:
        missing: what the level at the window's centre lacks of the limit.
        since: days from that centre to now.
        slopes: those that may be, equally likely.
        error: standard error of that level.
    """
    return tuple(
        (max(0.0, (missing - error * off) / slope - since), weight / len(slopes))
        for slope in slopes
        if slope > 0
        for off, weight in _LEVELS
    )


def _came(log_days: float, wait: float, scored: int) -> float:
    """The chance that a wait is over: the slope wanders on the way, and has wandered in the window."""
    if wait <= exp(_SOONEST):
        return 1.0
    spread = _WANDER * sqrt(min(wait, _LONGEST_WANDER) / _WANDER_DAYS + scored / _WINDOW_DAYS)
    return normal_cdf((log_days - log(wait)) / spread)


def _end(came: Callable[[float], float], share: float) -> float | None:
    if came(_SOONEST) >= share:
        return 0.0
    if came(_LATEST) < share:
        return None
    return exp(root(lambda u: came(u) - share, _SOONEST, _LATEST, within=1e-6))


def _alike(residuals: Sequence[float]) -> float:
    """How much a day resembles the one before: correlation at lag 1, corrected for its bias in short series."""
    squares = sum(one * one for one in residuals)
    if squares == 0:
        return 0.0
    found = sum(a * b for a, b in pairwise(residuals)) / squares
    # Marriott and Pope (1954), Kendall (1954): short series show too little of it.
    return min(_MOST_ALIKE, max(0.0, found + (1 + 3 * found) / len(residuals)))


@lru_cache(maxsize=32)
def _students(degrees: float) -> tuple[float, ...]:
    """Student's t in equal parts."""
    return tuple(student_quantile((k + 0.5) / _DRAWS, degrees) for k in range(_DRAWS))
