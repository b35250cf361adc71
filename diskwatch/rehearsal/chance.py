"""Chance that can be repeated: one stream of random numbers for each part of the invented world.

Each part draws from a stream of its own, named after it, so that adding a drive or an event changes nothing of
what happens to the others.
"""

import hashlib
from math import exp, sqrt
from random import Random

_DIRECT = 30.0
"""Mean beyond which a Poisson count is drawn from the normal law, whose error there is far below one."""


def stream(seed: int, *names: object) -> Random:
    """The stream of a part of the world; the same seed and names always give the same numbers."""
    told = "\0".join(map(str, (seed, *names))).encode()
    return Random(int.from_bytes(hashlib.sha256(told).digest()[:16]))  # noqa: S311 - physics, not secrets


def poisson(rng: Random, mean: float) -> int:
    """A count of rare events, by multiplying uniform numbers (Knuth 1969, from memory)."""
    if mean <= 0:
        return 0
    if mean > _DIRECT:
        return max(0, round(rng.gauss(mean, sqrt(mean))))
    floor, product, count = exp(-mean), rng.random(), 0
    while product > floor:
        product *= rng.random()
        count += 1
    return count


def share_of(rng: Random, count: int, chance: float) -> int:
    """How many of a few things happen, each with the same chance."""
    if count <= 0 or chance <= 0:
        return 0
    if chance >= 1:
        return count
    if count > 50:
        return min(count, poisson(rng, count * chance)) if chance < 0.1 else _normal_share(rng, count, chance)
    return sum(rng.random() < chance for _ in range(count))


def _normal_share(rng: Random, count: int, chance: float) -> int:
    drawn = round(rng.gauss(count * chance, sqrt(count * chance * (1 - chance))))
    return min(count, max(0, drawn))
