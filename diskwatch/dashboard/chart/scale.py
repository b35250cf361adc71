"""From values to rows: even steps, or steps of ten where values are far apart. Pure."""

import math
from collections.abc import Iterable
from dataclasses import dataclass

_APART = 50
"""Counts that rise to so many times what they usually rise are told apart by powers of ten only."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """What the lowest and the highest row stand for.

    Attributes:
        low: value of the lowest row.
        high: value of the highest row, above ``low``.
        whole: whether parts of 1 mean nothing.
        tens: whether equal distances are equal factors; 0 has its place below 1 (the logarithm
            is of 1 + value).
    """

    low: float
    high: float
    whole: bool = False
    tens: bool = False

    def share(self, value: float) -> float:
        """How far up a value stands: 0 at ``low``, 1 at ``high``, beyond where it is beyond."""
        low, high, at = (self._bent(one) for one in (self.low, self.high, value))
        return (at - low) / (high - low)

    def marks(self, most: int) -> tuple[float, ...]:
        """Round values for the margin, at most so many and at least one, from low to high."""
        if self.tens:
            marks = [0.0, *(10.0**power for power in range(16))]
            within = [mark for mark in marks if self.low <= mark <= self.high]
            return tuple(within[:: max(1, math.ceil(len(within) / max(most, 1)))])
        step = _round_step((self.high - self.low) / max(most - 1, 1))
        if self.whole:
            step = max(step, 1.0)
        first = math.ceil(self.low / step - 1e-9)
        last = math.floor(self.high / step + 1e-9)
        return tuple(step * number for number in range(first, last + 1)) or (self.low,)

    def _bent(self, value: float) -> float:
        return math.log10(1 + max(value, 0.0)) if self.tens else value


def scale_of(values: Iterable[float], *, whole: bool) -> Scale:
    """A scale that shows all values.

    Args:
        values: what it must hold; none of them gives 0 to 1.
        whole: whether they are counts, which have no place below 0 and no parts.
    """
    known = sorted(values)
    if not known:
        return Scale(low=0.0, high=1.0)
    low, high = known[0], known[-1]
    moved = [value - low for value in known if value > low]
    if whole and low >= 0 and moved and high - low > _APART * max(moved[len(moved) // 2], 1):
        return Scale(low=0.0, high=high, whole=True, tens=True)
    if high == low:
        return Scale(low=low if whole else low - 1, high=high + 1, whole=whole)
    air = 0.0 if whole else (high - low) * 0.05
    return Scale(low=max(low - air, 0.0) if low >= 0 else low - air, high=high + air, whole=whole)


def _round_step(least: float) -> float:
    """The next of 1, 2, 5, 10, ... times a power of ten."""
    power = 10.0 ** math.floor(math.log10(least))
    return next(power * factor for factor in (1, 2, 5, 10) if power * factor >= least * (1 - 1e-9))
