"""How long an amount lasts when the pace of using it wanders.

The pace is ``exp(sigma B_s)`` times its present value, with B a Brownian motion: no trend is assumed, only that
nobody knows next year's use. An amount that would last x at the present pace lasts T, where

    integral from 0 to T of exp(sigma B_s) ds = x.

Brownian scaling leaves one law for all sigma: sigma^2 T depends on sigma^2 x alone. With t = sigma^2 T and
p = ln(x / T), the chance u(ln t, p) = P(T > t) solves, by Kolmogorov's backward equation,

    du/d(ln t) = (1 - exp(-p)) du/dp + t/2 d2u/dp2,

solved here once by Crank and Nicolson's implicit differences (1947) from the law for small t: the logarithm of
the amount used up in T, over T, is nearly normal with variance t/3. The law is known in closed form too: exp(B)
is a planar Bessel process run by this very clock (Lamperti's relation; Yor 1992), which gives the Laplace
transform that the tests hold the table against.
"""

from array import array
from functools import cache
from math import asinh, exp, log, pi, sinh, sqrt

from diskwatch.trends.special import normal_cdf

_START, _SMALL, _LAST = log(0.01), log(0.1), log(150.0)
_STEPS = 240
_SCALE = 0.05
_LEFT, _RIGHT, _NODES = -5.6, 7.4, 261
_SMEAR = tuple(k / 2 for k in range(-7, 8))
_SMEAR_WEIGHTS = tuple(exp(-e * e / 2) / sum(exp(-f * f / 2) for f in _SMEAR) for e in _SMEAR)


def outlasts(years: float, *, amount: float, variance: float, error: float) -> float:
    """The chance that an amount lasts longer than a time.

    Args:
        years: the time, above 0.
        amount: x: years that it lasts at the present pace, above 0; known up to a factor.
        variance: sigma^2 a year, above 0.
        error: standard deviation of the logarithm of that factor, at least 0.

    Returns:
        A probability; it falls with the time and rises with the amount.
    """
    lead = log(amount / years)
    t = variance * years
    if t <= exp(_SMALL):
        return _early(t, lead, error)  # close to normal, as the error is, so both add up
    # Equal steps with normal weights: for smooth functions this sum is as good as exact.
    row = min(log(t), _LAST)
    pairs = zip(_SMEAR, _SMEAR_WEIGHTS, strict=True)
    return sum(weight * _read(row, lead + error * e) for e, weight in pairs)


def _early(t: float, lead: float, error: float) -> float:
    """The law for small t: mean t/12, variance t/3, and Edgeworth's term for the third cumulant, t^2/15."""
    spread = sqrt(t / 3 + error * error)
    z = (lead - t / 12) / spread
    skew = t * t / 15 / spread**3
    bend = exp(-z * z / 2) / sqrt(2 * pi) * (z * z - 1) * skew / 6
    return min(1.0, max(0.0, normal_cdf(z) - bend))


def _read(log_t: float, lead: float) -> float:
    """The chance u from the table, linear between its points."""
    table = _table()
    row = (log_t - _START) / (_LAST - _START) * _STEPS
    column = (asinh(lead / _SCALE) - _LEFT) / (_RIGHT - _LEFT) * (_NODES - 1)
    if column <= 0:
        return 0.0
    if column >= _NODES - 1:
        return 1.0
    i, j = min(int(row), _STEPS - 1), int(column)
    right, down = column - j, row - i
    upper, lower = table[i], table[i + 1]
    return (1 - down) * (upper[j] + right * (upper[j + 1] - upper[j])) + down * (
        lower[j] + right * (lower[j + 1] - lower[j])
    )


@cache
def _table() -> tuple["array[float]", ...]:
    """The chance u at all points: one row a value of ln t, one column a value of p, dense around p = 0."""
    width = (_RIGHT - _LEFT) / (_NODES - 1)
    points = [_SCALE * sinh(_LEFT + k * width) for k in range(_NODES)]
    first = exp(_START)
    rows = [array("d", (_early(first, p, 0.0) for p in points))]
    rows[0][0], rows[0][-1] = 0.0, 1.0
    step = (_LAST - _START) / _STEPS
    for k in range(_STEPS):
        # The equation's own time stands half way between the two rows.
        rows.append(_advanced(rows[-1], points, exp(_START + (k + 0.5) * step), step))
    return tuple(rows)


def _advanced(old: "array[float]", points: list[float], t: float, step: float) -> "array[float]":
    """One implicit step; the ends stay at 0 and 1."""
    last = len(points) - 1
    kept, carried = [0.0] * (last + 1), [0.0] * (last + 1)
    carried[0] = old[0]
    for j in range(1, last):
        left, right = points[j] - points[j - 1], points[j + 1] - points[j]
        down, up = _weights(1 - exp(-points[j]), t / 2, left, right)
        half = step / 2
        known = old[j] + half * (down * (old[j - 1] - old[j]) + up * (old[j + 1] - old[j]))
        pivot = 1 + half * (down + up) - half * down * kept[j - 1]
        kept[j] = half * up / pivot
        carried[j] = (known + half * down * carried[j - 1]) / pivot
    new = array("d", old)
    for j in range(last - 1, 0, -1):
        # The differences may step over 0 or 1 by some millionths; a chance may not.
        new[j] = min(1.0, max(0.0, carried[j] + kept[j] * new[j + 1]))
    return new


def _weights(flow: float, spread: float, left: float, right: float) -> tuple[float, float]:
    """What the neighbours on both sides weigh: central differences where these stay monotone, else upwind."""
    both = left + right
    down, up = 2 * spread / left / both, 2 * spread / right / both
    if abs(flow) * max(left, right) <= 2 * spread:
        return down - flow * right / left / both, up + flow * left / right / both
    return down + max(0.0, -flow) / left, up + max(0.0, flow) / right
