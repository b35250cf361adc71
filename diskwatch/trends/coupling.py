"""Whether a drive's slowness follows its temperature: then heat is the first cause to look at.

Spearman's rank correlation (Spearman 1904; ties get their mean rank) over the latest scored days. A shared
season or a shared long-term trend couples two series as well as a cause does, so this names a cause to look
at and raises no alarm of its own.
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

Of 30 days that have nothing to do with each other about 2 in 1,000 come above it by chance (normal
approximation, 0.5 * sqrt(29) = 2.69 standard errors, from memory), more where days resemble their neighbours.
"""


class Unknown(StrEnum):
    """Why nothing can be said of the coupling."""

    FEW_DAYS = "few-days"
    STEADY = "steady"


@dataclass(frozen=True, slots=True, kw_only=True)
class Coupling:
    """How closely a day's shift follows the day's temperature.

    Attributes:
        correlation: rank correlation, -1 to 1; None where nothing can be said.
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
    found = rank_correlation([shift for _, shift, _ in near], [warmth for _, _, warmth in near])
    return Coupling(correlation=found, unknown=Unknown.STEADY if found is None else None, days=len(near))


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
