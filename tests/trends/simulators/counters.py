"""Invented lives of error counters: when they rise, day by powered day, at a norm, around it and beyond it.

The episode assumption says that outside absorbed days the chance of an episode on a powered day, given the
past, is at most ``1 - exp(-norm)``. `AT_THE_NORM` meets it exactly where nothing spills. Every other world
bends it in a way of its own, so that it can be seen what the bound on false alarms then does.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from math import exp, pi, sin
from random import Random

from diskwatch.trends.norms import YEAR


@dataclass(frozen=True, slots=True, kw_only=True)
class World:
    """How counters rise.

    Attributes:
        times: rate of episodes in units of the norm.
        unlike: True where each drive has a rate of its own, exponential with that mean.
        spill: chance that an episode goes on for another day.
        long: share of episodes that go on far longer: as many days as a Pareto law with exponent 1 gives.
        season: swing of the rate over the year; 0.5 means from half the mean to one and a half times it.
        habit: by how much the rate is multiplied in a bad time; bad times fill a tenth of all, half a year
            each on average, and the mean over good and bad stays ``times``.
    """

    times: float = 1.0
    unlike: bool = False
    spill: float = 0.0
    long: float = 0.0
    season: float = 0.0
    habit: float = 1.0


AT_THE_NORM = World()
_BAD_SHARE = 0.1
_BAD_DAYS = 182.6


def rises(chance: Random, *, per_day: float, days: int, world: World) -> Iterator[tuple[int, int]]:
    """Stretches of days on which a counter rises, as first and last powered day; they may overlap.

    Args:
        chance: where all randomness comes from.
        per_day: the norm, episodes a powered day.
        days: how many powered days the life has; the first is 1.
        world: how counters rise.
    """
    rate = per_day * world.times * (chance.expovariate(1) if world.unlike else 1.0)
    if rate == 0:
        return
    greatest = rate * (1 + world.season) * max(1.0, world.habit)
    bad = _bad_times(chance, days) if world.habit > 1 else iter(())
    stretch = next(bad, None)
    good = (1 - world.habit * _BAD_SHARE) / (1 - _BAD_SHARE)
    phase = chance.random()
    day = 0
    while True:
        # The waiting time in whole days: geometric, by inversion of the exponential law.
        day += 1 + int(chance.expovariate(greatest))
        if day > days:
            return
        while stretch is not None and stretch[1] < day:
            stretch = next(bad, None)
        now = rate * (1 + world.season * sin(2 * pi * (day / YEAR + phase)))
        if world.habit > 1:
            now *= world.habit if stretch is not None and stretch[0] <= day else good
        # Thinned: candidates come at the greatest rate, and each is taken with its day's share of that.
        if now >= greatest or chance.random() < (1 - exp(-now)) / (1 - exp(-greatest)):
            yield day, day + _goes_on(chance, world)


def _bad_times(chance: Random, days: int) -> Iterator[tuple[float, float]]:
    at = 0.0
    while at < days:
        begins = at + chance.expovariate(_BAD_SHARE / (1 - _BAD_SHARE) / _BAD_DAYS)
        at = begins + chance.expovariate(1 / _BAD_DAYS)
        yield begins, at


def _goes_on(chance: Random, world: World) -> int:
    """Days beyond the first on which an episode goes on."""
    if world.long and chance.random() < world.long:
        return min(3650, int(1 / max(1e-9, chance.random())))
    more = 0
    while world.spill and chance.random() < world.spill:
        more += 1
    return more


def daily(stretches: Iterator[tuple[int, int]], days: int) -> set[int]:
    """The days on which a counter rises."""
    return {day for first, last in stretches for day in range(first, min(last, days) + 1)}
