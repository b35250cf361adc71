"""Classical methods that this house does not use itself, as yardsticks for those it does.

Page's CUSUM knows both the sound and the changed state: nobody can be quicker at the same rate of false alarms.
"""

from collections.abc import Sequence
from math import cos, exp, log, pi, sqrt

from diskwatch.trends.special import normal_cdf


def cusum_run_length(shift: float, *, reference: float, threshold: float, nodes: int = 40) -> float:
    """Mean number of steps until Page's one-sided CUSUM of normal values alarms, started at 0.

    The integral equation of Page (1954), L(s) = 1 + L(0) P(to 0) + integral of L(y) p(y - s), solved at
    Gauss-Legendre points.

    Args:
        shift: mean of the values, whose standard deviation is 1.
        reference: what each step takes off.
        threshold: value of the sum at which it alarms.
        nodes: points of the quadrature.
    """
    points = [(threshold * (1 + x) / 2, threshold * weight / 2) for x, weight in legendre(nodes)]
    drift = shift - reference
    unknowns = [0.0, *(point for point, _ in points)]  # L is sought at 0 and at the points
    rows = []
    for k, here in enumerate(unknowns):
        row = [-normal_cdf(-here - drift)]
        row += [-weight * exp(-((y - here - drift) ** 2) / 2) / sqrt(2 * pi) for y, weight in points]
        row[k] += 1
        rows.append([*row, 1.0])
    return solved(rows)[0]


def legendre(count: int) -> list[tuple[float, float]]:
    """Points and weights of Gauss and Legendre on -1 to 1, by Newton's steps."""
    found = []
    for k in range(count):
        x = cos(pi * (k + 0.75) / (count + 0.5))
        for _ in range(50):
            before, value = 1.0, x
            for n in range(2, count + 1):
                before, value = value, ((2 * n - 1) * x * value - (n - 1) * before) / n
            slope = count * (x * value - before) / (x * x - 1)
            x -= value / slope
        found.append((x, 2 / ((1 - x * x) * slope * slope)))
    return found


def solved(rows: list[list[float]]) -> list[float]:
    """The solution of linear equations, each row with its right side last (Gauss, with pivots)."""
    size = len(rows)
    for k in range(size):
        pivot = max(range(k, size), key=lambda j: abs(rows[j][k]))
        rows[k], rows[pivot] = rows[pivot], rows[k]
        for j in range(k + 1, size):
            factor = rows[j][k] / rows[k][k]
            for column in range(k, size + 1):
                rows[j][column] -= factor * rows[k][column]
    answer = [0.0] * size
    for k in reversed(range(size)):
        known = sum(rows[k][j] * answer[j] for j in range(k + 1, size))
        answer[k] = (rows[k][size] - known) / rows[k][k]
    return answer


def siegmund(shift: float, *, reference: float, threshold: float) -> float:
    """Siegmund's formula (1985) for the same run length."""
    drift, above = shift - reference, threshold + 1.166
    return (exp(-2 * drift * above) + 2 * drift * above - 1) / (2 * drift * drift)


def laplace(times: Sequence[float], end: float) -> float:
    """Laplace's statistic of events up to an end, standard normal without trend; above 0: getting worse."""
    return (sum(times) / len(times) - end / 2) / (end * sqrt(1 / (12 * len(times))))


def single_change(values: Sequence[float]) -> int:
    """After how many values a single change of the mean fits best, by least squares."""

    def scatter(part: Sequence[float]) -> float:
        mean = sum(part) / len(part)
        return sum((value - mean) ** 2 for value in part)

    return min(range(1, len(values)), key=lambda k: scatter(values[:k]) + scatter(values[k:]))


def information(ratio: float, norm: float) -> float:
    """What a rate of ``ratio`` times the norm tells a unit of time (Kullback and Leibler)."""
    return norm * (ratio * log(ratio) - ratio + 1)
