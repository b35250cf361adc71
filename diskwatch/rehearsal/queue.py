"""A drive serves one request at a time: how long requests wait for their turn, whatever sort they are.

Few requests are served one by one; many by the mean that the law for random arrivals gives (Pollaczek and
Khinchine; the mean wait is l E[S^2] / (2 (1 - u)) with arrivals l, service S, utilisation u = l E[S]).
"""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from math import sqrt
from random import Random

from diskwatch.rehearsal.rotating import Service

FULL = 0.95
"""Utilisation beyond which callers hold back: nobody issues requests for ever to a drive that cannot follow."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Served:
    """What a span of requests came to.

    Attributes:
        total_ms: time from arrival to completion, summed over requests.
        busy_ms: time in which at least one was under way.
    """

    total_ms: float
    busy_ms: float


NOTHING = Served(total_ms=0.0, busy_ms=0.0)


def one_by_one(requests: Iterable[tuple[float, float]]) -> Iterator[Served]:
    """Serve requests in the order in which they came; what became of each.

    Args:
        requests: (arrival, service time) of each, milliseconds, by arrival.
    """
    free = 0.0
    for arrival, service in requests:
        free = max(free, arrival) + service
        yield Served(total_ms=free - arrival, busy_ms=service)


def added(parts: Iterable[Served]) -> Served:
    """What requests came to together."""
    total = busy = 0.0
    for one in parts:
        total += one.total_ms
        busy += one.busy_ms
    return Served(total_ms=total, busy_ms=busy)


def mixed(sorts: Sequence[tuple[int, Service]]) -> Service:
    """What a request of several sorts costs in the mean.

    Args:
        sorts: how many of each sort, at least one in all, and what one costs.
    """
    count = sum(number for number, _ in sorts)
    mean = sum(number * one.mean_ms for number, one in sorts) / count
    square = sum(number * one.square_ms for number, one in sorts) / count
    return Service(mean_ms=mean, variance=max(0.0, square - mean**2))


def mean_wait_ms(arrivals: float, service: Service) -> float:
    """Mean wait before service begins.

    Args:
        arrivals: requests a millisecond.
        service: what each costs; together below `FULL`.
    """
    used = arrivals * service.mean_ms
    return arrivals * service.square_ms / (2 * (1 - used))


def together(
    rng: Random, span_ms: float, sorts: Sequence[tuple[int, Service]], *, direct: bool
) -> tuple[Served, ...]:
    """Serve many requests that come at random over a span, by their means and the scatter of these.

    All wait in one queue, then each sort takes its own time: behind slow reads, writes wait a little longer.

    Args:
        rng: chance.
        span_ms: over how long.
        sorts: how many of each sort, and what one costs.
        direct: whether one waits for the other before it asks, as a copy does; then there is no queue.

    Returns:
        What each sort came to.
    """
    count = sum(number for number, _ in sorts)
    if count == 0:
        return tuple(NOTHING for _ in sorts)
    service = mixed(sorts)
    wait = 0.0 if direct else mean_wait_ms(min(count / span_ms, FULL / service.mean_ms), service)
    means = [
        max(one.mean_ms * 0.25, rng.gauss(one.mean_ms, sqrt(one.variance / number))) if number else 0.0
        for number, one in sorts
    ]
    busy = sum(number * mean for (number, _), mean in zip(sorts, means, strict=True))
    held = min(1.0, span_ms / busy) if busy > 0 else 1.0
    return tuple(
        Served(total_ms=number * (mean + wait), busy_ms=number * mean * held) if number else NOTHING
        for (number, _), mean in zip(sorts, means, strict=True)
    )
