"""Exact limits for shares and counts: never too narrow, however few there are.

Clopper and Pearson (1934) for a share, Garwood (1936) for a Poisson count; each end is the value at which what
was seen, or more of it, has just the half of what the interval may miss.
"""

from math import inf

from diskwatch.trends.special import beta_quantile, gamma_quantile


def share_limits(hits: int, tries: int, probability: float = 0.8) -> tuple[float, float]:
    """Between which shares the true one lies.

    Args:
        hits: how many tries hit.
        tries: how many there were, at least 1.
        probability: of the limits, at least that.

    Raises:
        ValueError: hits and tries do not fit, or the probability lies outside.
    """
    if not 0 <= hits <= tries or tries < 1:
        raise ValueError(f"{hits} hits of {tries} tries are no share")
    tail = (1 - probability) / 2
    low = beta_quantile(tail, hits, tries - hits + 1) if hits else 0.0
    high = beta_quantile(1 - tail, hits + 1, tries - hits) if hits < tries else 1.0
    return low, high


def count_limits(count: int, probability: float = 0.8) -> tuple[float, float]:
    """Between which means the true one of a Poisson count lies; divided by its exposure, a rate's limits.

    Args:
        count: how many were seen, 0 or more.
        probability: of the limits, at least that; 1 minus half of the rest for one-sided use.

    Raises:
        ValueError: the count is below 0, or the probability lies outside.
    """
    if not 0 <= count < inf:
        raise ValueError(f"{count} is no count")
    tail = (1 - probability) / 2
    return (gamma_quantile(tail, count) if count else 0.0), gamma_quantile(1 - tail, count + 1)
