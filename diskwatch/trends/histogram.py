"""Log-histograms: many times condensed so that any quantile can be had later, and sums stay exact.

Sixteen bins an octave: a bin is 2^(1/16) wide, so its middle is at most 2.2 % away from anything in it. Counts
of the same bin add up, over days and over classes; that is why they are kept in place of medians. Sparse: only
bins that hold something. (Method: our own study of latency from ordinary traffic; bin width chosen there.)
"""

import math
from collections.abc import Iterable, Mapping

PER_OCTAVE = 16
LOWEST = -10 * PER_OCTAVE
"""The bin of 2^-10 and all below, zero included: of times in milliseconds, those under a microsecond."""

HIGHEST = 40 * PER_OCTAVE
"""The bin of 2^40 and all above; nothing that a disk does takes 34 years."""


def bin_of(amount: float) -> int:
    """The bin of an amount, which may be in any unit.

    Raises:
        ValueError: it is below zero, or no number.
    """
    if not amount >= 0:
        raise ValueError(f"expected an amount of at least 0, not {amount!r}")
    if amount <= 2.0 ** (LOWEST / PER_OCTAVE):
        return LOWEST
    return min(HIGHEST, math.floor(math.log2(amount) * PER_OCTAVE)) if math.isfinite(amount) else HIGHEST


def middle(bin_: int) -> float:
    """The amount that stands for a bin: its middle on the logarithmic scale."""
    return float(2.0 ** ((bin_ + 0.5) / PER_OCTAVE))


def histogram(amounts: Iterable[float]) -> dict[int, int]:
    """Counts by bin, lowest bin first.

    Raises:
        ValueError: an amount is below zero, or no number.
    """
    counts: dict[int, int] = {}
    for amount in amounts:
        found = bin_of(amount)
        counts[found] = counts.get(found, 0) + 1
    return dict(sorted(counts.items()))


def added(one: Mapping[int, int], other: Mapping[int, int]) -> dict[int, int]:
    """Two histograms as one, as if both had been counted together."""
    return {bin_: one.get(bin_, 0) + other.get(bin_, 0) for bin_ in sorted(one.keys() | other.keys())}


def quantile(counts: Mapping[int, int], share: float) -> float | None:
    """The amount that a share of all does not exceed, to within half a bin; None for an empty histogram.

    The definition is the inverse of the distribution function (Hyndman and Fan 1996, type 1; from memory).

    Args:
        counts: by bin.
        share: above 0, at most 1; 0.5 for the median.

    Raises:
        ValueError: the share lies outside.
    """
    if not 0 < share <= 1:
        raise ValueError(f"expected a share above 0 and at most 1, not {share!r}")
    wanted = share * sum(counts.values())
    reached = 0
    for bin_, count in sorted(counts.items()):
        reached += count
        # A hair's breadth, since 0.1 * 30 is a little more than 3 in binary fractions.
        if reached >= wanted * (1 - 1e-12) and count:
            return middle(bin_)
    return None
