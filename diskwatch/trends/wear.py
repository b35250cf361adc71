"""When will the wear of a solid-state drive reach its limit?

The drive tells its wear in whole per cent and its writing in bytes. Between the first and the last step of the
percentage that was seen, wear per byte follows; the present pace of writing and how much that pace wandered so
far tell the rest. What is uncertain is not the fit but next year's use: intervals from the scatter about a
fitted line cover 1 to 15 % where they promise 80 (our own simulation study, whose method and constants these
are). Nothing here knows how much a drive may still do past its limit, or whether something else ends it first.

Any amount that is used up in whole units serves as well: spare blocks, say, with 100 minus the spare for the
wear and 100 minus its threshold for the limit.
"""

from dataclasses import dataclass, replace
from math import exp, log, sqrt

from diskwatch.trends.interval import USUAL, Interval, unknown
from diskwatch.trends.norms import YEAR
from diskwatch.trends.roots import root
from diskwatch.trends.wandering import outlasts

BLOCK = 45
"""Days of writing that are compared with the next as many."""

_MARK = BLOCK // 3
_KEPT = 26  # marks, a little over a year of them
_NOISE = 1.6
"""Variance of one day's writing over its squared mean, about the level of the moment (the study's figure)."""

PRIOR = ((0.02, 0.010), (0.05, 0.275), (0.1, 0.377), (0.2, 0.220), (0.4, 0.084), (0.8, 0.026), (1.6, 0.007))
"""Variance of the logarithm of the pace a year, and how likely it is held before anything was seen."""

_LEAST_DAYS = 40
_LEAST_STEPS = 2
_LONGEST = 1000.0  # years: beyond this the search for an end stops, and the interval stays open


@dataclass(frozen=True, slots=True, kw_only=True)
class Wear:
    """A drive's wear through time; plain values, complete for a restart.

    Attributes:
        by_volume: True where the drive counts what is written to it; else its powered days stand for that.
        percent: wear as last read, in whole per cent.
        written: what was written in all since the first reading (bytes, or powered days), resets bridged.
        last_read: the counter of writing as last read.
        powered: powered days watched.
        steps: how many times the percentage was seen to rise.
        first_step: (percentage, written) at the first of them; None before.
        last_step: the same at the last.
        marks: (day, written) every 15 days or more, oldest first, the last year of them.
        block: (day, written) at which the open block of 45 days began.
        block_log: logarithm of what the block before it wrote a day; None where there is none to compare with.
        compared: how many pairs of successive blocks were compared.
        squares: sum of the squared differences of their logarithms.
    """

    by_volume: bool
    percent: int
    written: float
    last_read: float
    powered: float
    steps: int
    first_step: tuple[int, float] | None
    last_step: tuple[int, float] | None
    marks: tuple[tuple[float, float], ...]
    block: tuple[float, float]
    block_log: float | None
    compared: int
    squares: float


def begin(*, day: float, percent: int, written: float | None) -> Wear:
    """The state at the first reading.

    Args:
        day: days since some fixed moment.
        percent: wear in whole per cent.
        written: the drive's counter of data written, in any unit that stays; None where it has none.
    """
    return Wear(
        by_volume=written is not None,
        percent=percent,
        written=0.0,
        last_read=written or 0.0,
        powered=0.0,
        steps=0,
        first_step=None,
        last_step=None,
        marks=((day, 0.0),),
        block=(day, 0.0),
        block_log=None,
        compared=0,
        squares=0.0,
    )


def seen(wear: Wear, *, day: float, percent: int, written: float | None, powered: float) -> Wear:
    """Take in a later reading.

    A counter of writing that fell began anew: nothing is invented for what it lost. A percentage that fell
    makes the steps before it worthless (replaced firmware, another scale), so they are forgotten.

    Args:
        wear: state before.
        day: as for `begin`, not earlier than the reading before.
        percent: wear in whole per cent.
        written: counter of data written; None where not known this time (the reading then says nothing, unless
            the drive has no such counter at all).
        powered: powered days since the reading before, 0 or more.
    """
    if wear.by_volume and written is None:
        return replace(wear, powered=wear.powered + powered)
    more = max(0.0, (written or 0.0) - wear.last_read) if wear.by_volume else powered
    now = replace(
        wear,
        written=wear.written + more,
        last_read=written or 0.0,
        powered=wear.powered + powered,
        percent=percent,
    )
    if percent < wear.percent:
        now = replace(now, steps=0, first_step=None, last_step=None)
    elif percent > wear.percent:
        step = (percent, now.written)
        now = replace(now, steps=now.steps + 1, first_step=now.first_step or step, last_step=step)
    if day >= now.marks[-1][0] + _MARK:
        now = replace(now, marks=(*now.marks, (day, now.written))[-_KEPT:])
    return _closed_block(now, day)


def _closed_block(wear: Wear, day: float) -> Wear:
    start, before = wear.block
    if day < start + BLOCK:
        return wear
    amount = wear.written - before
    # A block that a long gap stretched, or in which nothing was written, says nothing of how use wanders.
    level = log(amount / (day - start)) if amount > 0 and day < start + 1.5 * BLOCK else None
    both = level is not None and wear.block_log is not None
    change = level - wear.block_log if level is not None and wear.block_log is not None else 0.0
    return replace(
        wear,
        block=(day, wear.written),
        block_log=level,
        compared=wear.compared + both,
        squares=wear.squares + change * change,
    )


def volatility(wear: Wear) -> tuple[tuple[float, float], ...]:
    """How much the pace wanders: the grid of `PRIOR` with the weights that the blocks seen so far leave."""
    if not wear.by_volume:
        return PRIOR  # powered days say nothing about how the writing wanders
    logs = []
    for variance, weight in PRIOR:
        spread = variance * (BLOCK / YEAR) * 2 / 3 + 2 * _NOISE / BLOCK
        logs.append(log(weight) - wear.compared / 2 * log(spread) - wear.squares / (2 * spread))
    highest = max(logs)
    total = sum(exp(one - highest) for one in logs)
    return tuple((variance, exp(one - highest) / total) for (variance, _), one in zip(PRIOR, logs, strict=True))


def forecast(wear: Wear, *, day: float, limit: int = 100, probability: float = USUAL) -> Interval:
    """When the wear will reach a limit, in days from now.

    Args:
        wear: the state.
        day: now, as for `seen`.
        limit: in per cent of wear.
        probability: of the interval.

    Returns:
        The interval; without ends and with the reason where too little was seen; 0 to 0 where the limit is
        reached already.
    """
    if wear.percent >= limit:
        return Interval(low=0.0, high=0.0, probability=probability)
    if wear.powered < _LEAST_DAYS:
        return unknown(f"it was watched for fewer than {_LEAST_DAYS} powered days", probability)
    if wear.first_step is None or wear.last_step is None or wear.steps < _LEAST_STEPS:
        return unknown("its wear has not yet risen twice while it was watched", probability)
    (first, first_written), (last, last_written) = wear.first_step, wear.last_step
    if last_written <= first_written:
        return unknown("it counted no writing between two rises of its wear", probability)
    per_unit = (last - first) / (last_written - first_written)
    present = wear.percent + min(0.98, per_unit * (wear.written - last_written))
    weights = volatility(wear)
    window, pace = _pace(wear, day, sum(variance * weight for variance, weight in weights))
    if pace <= 0:
        return unknown("nothing was written to it lately", probability)
    amount = (limit - present) / (pace * per_unit) / YEAR
    # The days to come scatter as those behind did, which counts where few of them are left.
    fixed = _NOISE / YEAR * (1 / window + 1 / amount) + 0.005 + 0.025 / wear.steps**2
    laws = tuple((variance, weight, sqrt(fixed + variance * window / 3)) for variance, weight in weights)
    tail = (1 - probability) / 2
    low, high = _end(tail, amount, laws), _end(1 - tail, amount, laws)
    return Interval(low=_LONGEST * YEAR if low is None else low, high=high, probability=probability)


def _pace(wear: Wear, day: float, variance: float) -> tuple[float, float]:
    """The years over which the present pace is taken, and what was written a day in them.

    The longer the window the less noise it has and the more it lags: this length balances both.
    """
    wanted = min(max(sqrt(3 * _NOISE / YEAR / variance) * YEAR, 60.0), YEAR)
    since, before = wear.marks[0]
    for when, amount in wear.marks:
        if when <= day - wanted:
            since, before = when, amount
    length = max(day - since, 1.0)
    return length / YEAR, (wear.written - before) / length


def _end(share: float, amount: float, laws: tuple[tuple[float, float, float], ...]) -> float | None:
    """The time in days that the mixture of laws does not exceed with probability ``share``, or None."""

    def short(log_years: float) -> float:
        years = exp(log_years)
        outlast = sum(
            weight * outlasts(years, amount=amount, variance=variance, error=error)
            for variance, weight, error in laws
        )
        return 1 - outlast - share

    low, high = log(amount) - 5, log(_LONGEST)
    if low >= high or short(high) < 0:
        return None
    return exp(root(short, low, high, within=1e-6)) * YEAR
