"""Where a function crosses zero: bracketed, without derivatives, the same on every machine.

Chandrupatla (1997), "A new hybrid quadratic/bisection algorithm for finding the zero of a nonlinear function
without using derivatives" (from memory). It keeps a bracket, so it cannot run away, and is quick where the
function is smooth, which distribution functions are.
"""

from collections.abc import Callable

_MOST = 400


def root(function: Callable[[float], float], low: float, high: float, *, within: float = 1e-13) -> float:
    """A point between two ends at which a function changes its sign.

    Args:
        function: of one number; of different sign at the two ends, or zero at one of them.
        low: one end.
        high: the other end.
        within: how near to the crossing, as a difference.

    Raises:
        ValueError: the function has the same sign at both ends.
    """
    a, b = high, low
    fa, fb = function(a), function(b)
    if fa == 0:
        return a
    if fb == 0:
        return b
    if (fa > 0) == (fb > 0):
        raise ValueError(f"no change of sign between {low} and {high}")
    share = 0.5
    for _ in range(_MOST):
        x = a + share * (b - a)
        fx = function(x)
        if (fx > 0) == (fa > 0):
            c, fc = a, fa
        else:
            c, fc, b, fb = b, fb, a, fa
        a, fa = x, fx
        best, value = (a, fa) if abs(fa) < abs(fb) else (b, fb)
        least = (2e-16 * abs(best) + 0.5 * within) / abs(b - a) if b != a else 1.0
        if value == 0 or least > 0.5:
            return best
        share = min(1 - least, max(least, _step((a, b, c), (fa, fb, fc))))
    return best


def _step(points: tuple[float, float, float], values: tuple[float, float, float]) -> float:
    """Where in the bracket to look next: by inverse parabola where it may be trusted, else in the middle."""
    a, b, c = points
    fa, fb, fc = values
    xi = (a - b) / (c - b)
    phi = (fa - fb) / (fc - fb)
    if phi * phi < xi and (1 - phi) * (1 - phi) < 1 - xi:
        return fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
    return 0.5


def rising_root(
    function: Callable[[float], float], start: float, step: float = 1.0, *, within: float = 1e-13
) -> float:
    """Where a function that never falls crosses zero, from a guess; the bracket is sought by doubled steps.

    Args:
        function: never falling, and of both signs somewhere.
        start: a guess.
        step: first step away from it, above 0.
        within: how near to the crossing, as a difference.

    Raises:
        ValueError: no crossing was found as far as numbers reach.
    """
    here, value = start, function(start)
    way = -step if value > 0 else step
    while abs(way) < 1e300:
        there = here + way
        beyond = function(there)
        if (beyond > 0) != (value > 0) or beyond == 0:
            return root(function, min(here, there), max(here, there), within=within)
        here, way = there, 2 * way
    raise ValueError(f"no crossing was found from {start}")
