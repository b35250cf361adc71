"""One drive serves one request at a time: how long requests wait for their turn.

Few requests are served one by one; many by the mean that the law for random arrivals gives (Pollaczek and
Khinchine; the mean wait is l E[S^2] / (2 (1 - u)) with arrivals l, service S, utilisation u = l E[S]).
"""

from collections.abc import Iterable
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


def one_by_one(requests: Iterable[tuple[float, float]]) -> Served:
    """Serve requests in the order in which they came.

    Args:
        requests: (arrival, service time) of each, milliseconds, by arrival.
    """
    free = total = busy = 0.0
    for arrival, service in requests:
        free = max(free, arrival) + service
        total += free - arrival
        busy += service
    return Served(total_ms=total, busy_ms=busy)


def mean_wait_ms(arrivals: float, service: Service) -> float:
    """Mean wait before service begins.

    Args:
        arrivals: requests a millisecond.
        service: what each costs; together below `FULL`.
    """
    used = arrivals * service.mean_ms
    return arrivals * (service.variance + service.mean_ms**2) / (2 * (1 - used))


def together(rng: Random, count: int, span_ms: float, service: Service, *, direct: bool) -> Served:
    """Serve many requests that come at random over a span, by their mean and its scatter.

    Args:
        rng: chance.
        count: how many.
        span_ms: over how long.
        service: what each costs.
        direct: whether one waits for the other before it asks, as a copy does; then there is no queue.
    """
    if count == 0:
        return NOTHING
    scatter = sqrt(service.variance / count)
    mean = max(service.mean_ms * 0.25, rng.gauss(service.mean_ms, scatter))
    arrivals = min(count / span_ms, FULL / service.mean_ms)
    wait = 0.0 if direct else mean_wait_ms(arrivals, service)
    return Served(total_ms=count * (mean + wait), busy_ms=min(span_ms, count * mean))
