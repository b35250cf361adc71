"""Whether a drive's slowness follows its temperature: then heat is the first cause to look at.

Spearman's rank correlation (Spearman 1904; ties get their mean rank) over the latest scored days, of what is
left once both are held against the day itself: the partial correlation of three series (Kendall and Stuart,
from memory), worked out from ranks. Two series that both rise for their own reasons, a head that weakens in
spring, are coupled by time and by nothing else. In 400 simulated runs of 30 days, slowness and warmth that
share a trend came above the limit 2 times by this measure, and 308 to 400 times by the plain one; slowness that
follows the weather was found in 99 of 100 runs by either. Where a fan fails for good on one of the days, 80 of
100; where both jump on the same day by chance, 33 of 100 are blamed on heat: nobody can tell these apart
(simulated). So this names a cause to look at and raises no alarm of its own.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import sqrt

from diskwatch.trends.shift import DayShift

DAYS = 30
"""Scored days with a temperature that the coupling is asked of."""

WITHIN = 90
"""Calendar days that they may lie apart; further back, it was another season."""

FOLLOWS = 0.5
"""Correlation above which slowness follows temperature.

Of 30 days that have nothing to do with each other about 4 in 1,000 come above it by chance (normal
approximation, 0.5 * sqrt(28) = 2.65 standard errors, from memory); 1 in 100 where days resemble their
neighbours (simulated).
"""

_NOTHING_LEFT = 1e-12
"""What rounding leaves of a series that is nothing but a trend."""


class Unknown(StrEnum):
    """Why nothing can be said of the coupling."""

    FEW_DAYS = "few-days"
    STEADY = "steady"
    ONLY_TREND = "only-trend"


@dataclass(frozen=True, slots=True, kw_only=True)
class Coupling:
    """How closely a day's shift follows the day's temperature.

    Attributes:
        correlation: rank correlation with time taken out of both, -1 to 1; None where nothing can be said.
        unknown: why nothing can be said; None where something can.
        days: scored days with a temperature that were there.
    """

    correlation: float | None
    unknown: Unknown | None
    days: int

    @property
    def heat(self) -> bool:
        """Whether slowness follows temperature."""
        return self.correlation is not None and self.correlation > FOLLOWS


def coupling(recent: Sequence[DayShift]) -> Coupling:
    """Ask the latest scored days.

    Args:
        recent: scored days of one direction, oldest first.
    """
    pairs = [
        (one.day, one.shift, one.temperature)
        for one in recent
        if one.shift is not None and one.temperature is not None
    ][-DAYS:]
    near = [pair for pair in pairs if pair[0] > pairs[-1][0] - WITHIN]
    if len(near) < DAYS:
        return Coupling(correlation=None, unknown=Unknown.FEW_DAYS, days=len(near))
    days, shifts, warmths = zip(*near, strict=True)
    together, slowing, warming = (
        rank_correlation(shifts, warmths),
        rank_correlation(shifts, days),
        rank_correlation(warmths, days),
    )
    if together is None or slowing is None or warming is None:
        return Coupling(correlation=None, unknown=Unknown.STEADY, days=len(near))
    found = partial_correlation(together, slowing, warming)
    return Coupling(correlation=found, unknown=Unknown.ONLY_TREND if found is None else None, days=len(near))


def partial_correlation(together: float, one: float, other: float) -> float | None:
    """The correlation of two series with a third taken out of both.

    Args:
        together: correlation of the two.
        one: of the first with the third.
        other: of the second with the third.

    Returns:
        -1 to 1; None where the third leaves nothing of one of them.
    """
    left = (1 - one**2) * (1 - other**2)
    return max(-1.0, min(1.0, (together - one * other) / sqrt(left))) if left > _NOTHING_LEFT else None


def rank_correlation(one: Sequence[float], other: Sequence[float]) -> float | None:
    """Spearman's rank correlation of two series; None where either never changes.

    Raises:
        ValueError: they differ in length.
    """
    pairs = list(zip(_ranks(one), _ranks(other), strict=True))
    middle = (len(pairs) + 1) / 2
    together = sum((left - middle) * (right - middle) for left, right in pairs)
    apart = sqrt(
        sum((left - middle) ** 2 for left, _ in pairs) * sum((right - middle) ** 2 for _, right in pairs)
    )
    return max(-1.0, min(1.0, together / apart)) if apart else None


def _ranks(figures: Sequence[float]) -> list[float]:
    """Ranks from 1; equal figures share the mean of theirs."""
    order = sorted(range(len(figures)), key=figures.__getitem__)
    ranks = [0.0] * len(figures)
    first = 0
    while first < len(order):
        last = first
        while last + 1 < len(order) and figures[order[last + 1]] == figures[order[first]]:
            last += 1
        for place in order[first : last + 1]:
            ranks[place] = (first + last) / 2 + 1
        first = last + 1
    return ranks
