"""Trends that single wild values cannot move: the median slope, and the count of rises against falls.

The slope of Theil (1950) and Sen (1968), its limits by Sen's order statistics, and the statistic of Mann (1945)
and Kendall with its variance under ties. Both ask for independent values: neighbours that resemble each other
make the limits too narrow and the trend too sure, so neither ever raises an alarm here. Medians themselves are
in `diskwatch.trends.middle`.
"""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from math import inf, sqrt

from diskwatch.trends.middle import median
from diskwatch.trends.special import normal_cdf, normal_quantile


@dataclass(frozen=True, slots=True, kw_only=True)
class Slope:
    """A median slope with its limits.

    Attributes:
        slope: median of the slopes of all pairs, in units of y a unit of x.
        low: lower limit; minus infinity where there are too few values for one.
        high: upper limit; infinity likewise.
        at_median: median of y minus slope times median of x: the level at x = 0.
    """

    slope: float
    low: float
    high: float
    at_median: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Trend:
    """Rises against falls.

    Attributes:
        s: pairs that rise minus pairs that fall.
        variance: of s if there is no trend, ties considered.
        z: s in standard deviations, drawn by 1 towards 0 (continuity correction); 0 where all values tie.
        p: two-sided chance of an s so far from 0 if the values were independent and without trend.
    """

    s: int
    variance: float
    z: float
    p: float


def theil_sen(x: Sequence[float], y: Sequence[float], probability: float = 0.8) -> Slope:
    """The median of the slopes of all pairs with different x.

    Args:
        x: where, in any order.
        y: what was seen there.
        probability: of the limits.

    Raises:
        ValueError: not as many values of one as of the other, or no two different x.
    """
    places = list(zip(x, y, strict=True))
    slopes = sorted(
        (second[1] - first[1]) / (second[0] - first[0])
        for k, first in enumerate(places)
        for second in places[k + 1 :]
        if second[0] != first[0]
    )
    if not slopes:
        raise ValueError("a slope needs values at two different places")
    # Sen's formula (2.6), with ties among x taken out like those among y.
    variance = _no_ties(len(y)) - _ties(x) - _ties(y)
    half = normal_quantile((1 + probability) / 2) * sqrt(max(0.0, variance))
    low, high = round((len(slopes) - half) / 2) - 1, round((len(slopes) + half) / 2)
    slope = median(slopes)
    return Slope(
        slope=slope,
        low=slopes[low] if low >= 0 else -inf,
        high=slopes[high] if high < len(slopes) else inf,
        at_median=median(y) - slope * median(x),
    )


def mann_kendall(y: Sequence[float]) -> Trend:
    """Whether a series rises more often than it falls.

    Args:
        y: values in order of time.
    """
    s = sum((second > first) - (second < first) for k, first in enumerate(y) for second in y[k + 1 :])
    variance = _no_ties(len(y)) - _ties(y)
    z = 0.0 if variance <= 0 or s == 0 else (s - (1 if s > 0 else -1)) / sqrt(variance)
    return Trend(s=s, variance=variance, z=z, p=min(1.0, 2 * normal_cdf(-abs(z))))


def _no_ties(count: int) -> float:
    """Variance of s for so many values that all differ, without trend."""
    return count * (count - 1) * (2 * count + 5) / 18


def _ties(values: Sequence[float]) -> float:
    """What ties among the values take from that variance."""
    return sum(_no_ties(size) for size in Counter(values).values())
