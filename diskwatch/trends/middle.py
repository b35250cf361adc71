"""Medians: the middle of few figures, unmoved by the worst of them."""

from collections.abc import Sequence

_TO_STANDARD_DEVIATION = 1.4826
"""What makes a median absolute deviation estimate the standard deviation of normal figures (Hampel 1974)."""


def median(figures: Sequence[float]) -> float:
    """The middle figure, or the mean of the two middle ones.

    Raises:
        ValueError: there are no figures.
    """
    if not figures:
        raise ValueError("no figures have no median")
    ordered = sorted(figures)
    half, odd = divmod(len(ordered), 2)
    return float(ordered[half]) if odd else (ordered[half - 1] + ordered[half]) / 2


def scaled_mad(figures: Sequence[float]) -> float:
    """The median absolute deviation from the median, scaled to a standard deviation.

    Raises:
        ValueError: there are no figures.
    """
    middle = median(figures)
    return _TO_STANDARD_DEVIATION * median([abs(figure - middle) for figure in figures])


def weighted_quantile(figures: Sequence[float], weights: Sequence[float], share: float) -> float:
    """The smallest figure up to which the weights add to a share of all weight.

    Args:
        figures: in any order.
        weights: one a figure, none negative, not all of them 0.
        share: above 0, at most 1.

    Raises:
        ValueError: there are no figures, or not as many weights, or the weights add to nothing.
    """
    pairs = sorted(zip(figures, weights, strict=True))
    wanted = share * sum(weight for _, weight in pairs)
    if not wanted > 0:
        raise ValueError("figures without weight have no quantile")
    reached = 0.0
    for figure, weight in pairs:
        reached += weight
        # A hair's breadth, since 0.3 * 10 may come out a little above 3 in binary fractions.
        if reached >= wanted * (1 - 1e-12):
            return figure
    return pairs[-1][0]
