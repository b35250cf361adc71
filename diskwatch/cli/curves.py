"""Signals over a span of time for the dashboard: values, gaps, usual range, fit, what is to be expected."""

import math
from bisect import bisect_right
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from statistics import median

from diskwatch.dashboard.questions import Ahead, Curve
from diskwatch.history.reader import Past
from diskwatch.judge.names import begun, signal_name
from diskwatch.records import DriveLine, Forecast, Outcome, SignalNow
from diskwatch.trends.robust import theil_sen
from diskwatch.units import DAY, day_number

_LEARNT_FROM = 365 * DAY
"""The usual range and the fit look back so far, whatever span is shown."""
_FITTED = 90 * DAY
_FIT_POINTS = 40
_LEAST_KNOWN = 7 * DAY
"""A range seen for a shorter time is not called usual."""
_FINE = 8 * DAY
"""Up to this span gaps are told by passes, beyond it by days."""
_LEAST_GAP = 4 * 3_600
_BUCKETS = 400
"""Spans are thinned to so many stretches, of each first, lowest, highest and last: finer than any screen."""
_LEVELS = frozenset({"celsius", "percent-idle"})
"""Units of what goes up and down all the time, and is not held between two readings."""

Points = tuple[tuple[int, float], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """What is shown of time: from ``since`` to ``at``, UTC seconds since 1970."""

    since: int
    at: int


def curves(past: Past, line: DriveLine, span: Span) -> tuple[Curve, ...]:
    """Every signal of a drive, those that its call rests on first.

    Args:
        past: the history.
        line: the drive.
        span: what is shown.
    """
    found = gaps(past, line.number, span)
    ahead = {one.signal: one for one in line.forecasts}
    soon = {one.signal: one.low for one in line.forecasts if one.low is not None}
    grave = {signal: rank for rank, one in [*enumerate(line.findings)][::-1] for signal in one.signals}

    def order(signal: SignalNow) -> tuple[int, float, float, bool, str]:
        words = isinstance(signal.value, str)
        days = soon.get(signal.name, math.inf)
        return grave.get(signal.name, 99), days, -(signal.evidence or 0), words, signal.name

    return tuple(
        replace(_curve(past, line.number, signal, ahead.get(signal.name), span), gaps=found)
        for signal in sorted(line.signals, key=order)
    )


def _curve(past: Past, number: int, signal: SignalNow, forecast: Forecast | None, span: Span) -> Curve:
    series = past.series(number, signal.name, min(span.since, span.at - _LEARNT_FROM))
    known: Points = tuple((at, float(value)) for at, value in series if isinstance(value, int))
    held = signal.unit not in _LEVELS
    begin = max(bisect_right([at for at, _ in known], span.since) - 1, 0)
    return Curve(
        signal=signal.name,
        words=begun(signal_name(signal.name)),
        unit=signal.unit,
        now=signal.value,
        since=signal.since,
        evidence=signal.evidence,
        points=thinned(known[begin:], span),
        usual=None if held else usual(known, span.at),
        fit=None if forecast is None else fit(known, span.at),
        ahead=None if forecast is None else ahead_of(forecast, span.at),
        held=held,
    )


def ahead_of(forecast: Forecast, at: int) -> Ahead | None:
    """A forecast counted from now; None where nothing could be said."""
    if forecast.low is None:
        return None
    gone = day_number(at) - forecast.made_on_day
    high = None if forecast.high is None else max(forecast.high - gone, 0.0)
    return Ahead(limit=forecast.limit, low=max(forecast.low - gone, 0.0), high=high)


def gaps(past: Past, number: int, span: Span) -> tuple[tuple[int, int], ...]:
    """Where nothing was read of a drive, within a span."""
    if span.at - span.since <= _FINE:
        passes = past.passes(number, span.since - DAY)
        reads = [(one.at, one.at) for one in passes if one.outcome is Outcome.READ]
        between = [later[0] - earlier[1] for earlier, later in pairwise(reads)]
        least = max(_LEAST_GAP, 3 * int(median(between)) if between else 0)
    else:
        days = past.pass_days(number, span.since - DAY)
        reads = [(one.first, one.last) for one in days if one.outcome is Outcome.READ]
        least = DAY + _LEAST_GAP
    if not reads:
        return ((span.since, span.at),)
    ends = [last for _, last in reads]
    begins = [*(first for first, _ in reads[1:]), span.at]
    found = tuple(
        (end, begin)
        for end, begin in zip(ends, begins, strict=True)
        if begin - end > least and begin > span.since
    )
    before = reads[0][0]
    return ((span.since, before), *found) if before > span.since + least else found


def usual(points: Points, at: int) -> tuple[float, float] | None:
    """The range that held for nine tenths of the time, the lowest and the highest twentieth left out.

    Args:
        points: changes, oldest first; each value holds until the next.
        at: until when the last one holds, UTC seconds since 1970.
    """
    if not points or at - points[0][0] < _LEAST_KNOWN:
        return None
    until = [*(when for when, _ in points[1:]), at]
    spent = sorted((value, max(end - when, 0)) for (when, value), end in zip(points, until, strict=True))
    total = sum(length for _, length in spent)
    return _reached(spent, 0.05 * total), _reached(spent, 0.95 * total)


def _reached(spent: Sequence[tuple[float, int]], share: float) -> float:
    passed = 0.0
    for value, length in spent:
        passed += length
        if passed >= share:
            return value
    return spent[-1][0]


def fit(points: Points, at: int) -> tuple[tuple[int, float], tuple[int, float]] | None:
    """The straight line through the last quarter of a year, by the median of slopes (Theil 1950, Sen 1968)."""
    begin = max(at - _FITTED, points[0][0]) if points else at
    if at - begin < _LEAST_KNOWN:
        return None
    times = [begin + (at - begin) * step // _FIT_POINTS for step in range(_FIT_POINTS + 1)]
    changed = [when for when, _ in points]
    values = [points[max(bisect_right(changed, when) - 1, 0)][1] for when in times]
    if min(values) == max(values):
        return None
    slope = theil_sen([float(when - begin) for when in times], values)
    return (begin, slope.at_median), (at, slope.at_median + slope.slope * (at - begin))


def thinned(points: Points, span: Span) -> Points:
    """The same line, of no more points than any screen has columns of dots for."""
    if len(points) <= 4 * _BUCKETS:
        return points
    return tuple(_thinned(points, max((span.at - span.since) / _BUCKETS, 1)))


def _thinned(points: Points, width: float) -> Iterator[tuple[int, float]]:
    bucket: list[tuple[int, float]] = []
    for point in points:
        if bucket and int(point[0] / width) != int(bucket[0][0] / width):
            yield from _corners(bucket)
            bucket = []
        bucket.append(point)
    yield from _corners(bucket)


def _corners(bucket: list[tuple[int, float]]) -> Iterator[tuple[int, float]]:
    lowest = min(bucket, key=lambda point: point[1])
    highest = max(bucket, key=lambda point: point[1])
    yield from sorted({bucket[0], lowest, highest, bucket[-1]})
