"""Counters as a machine really gives them, taken through the product's own steps.

Machines are off for days and weeks, or on without anybody watching; batches are heavy-tailed; firmware sets a
counter back; some drives do not count their hours. The same steps as the analyser's: `increments`, `episodes`.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from random import Random

from diskwatch.trends import episodes, increments, ledger
from diskwatch.trends.norms import Norm
from tests.trends.simulators.counters import World, daily, rises


@dataclass(frozen=True, slots=True, kw_only=True)
class Machine:
    """How a drive is used and read.

    Attributes:
        on: chance that the machine is on at all on a day.
        away: chance a day that a pause of one to six weeks begins.
        blind: chance that a day on which the machine is on brings no reading.
        hours: powered hours of a day on which it is on; None where the drive does not count them.
        resets: chance a day that the counter begins anew at zero.
    """

    on: float = 0.8
    away: float = 1 / 200
    blind: float = 0.05
    hours: int | None = 9
    resets: float = 1 / 1500


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """One reading.

    Attributes:
        day: UTC day number.
        count: the counter.
        hours: powered hours, or None.
    """

    day: int
    count: int
    hours: int | None


def readings(chance: Random, norm: Norm, *, days: int, world: World, machine: Machine) -> Iterator[Seen]:
    """A drive's readings of one counter, a day at most one."""
    rising = daily(rises(chance, per_day=norm.per_day, days=days, world=world), days)
    powered, count, hours, away = 0, 0, 0, 0
    for day in range(days):
        away = away - 1 if away else (chance.random() < machine.away) * chance.randint(7, 42)
        if away or chance.random() > machine.on:
            continue
        powered += 1
        hours += machine.hours or 0
        if chance.random() < machine.resets:
            count = 0
        if powered in rising:
            # Pareto with exponent 0.7: the mean does not exist, single batches of thousands do.
            count += int(chance.random() ** (-1 / 0.7))
        if chance.random() >= machine.blind:
            yield Seen(day=day, count=min(count, 2**32 - 1), hours=None if machine.hours is None else hours)


def alarms(seen: Iterator[Seen], norm: Norm) -> tuple[int, float]:
    """Alarms of one drive in one stream, each beginning the evidence anew.

    Returns:
        Their number, and the powered days that were counted.
    """
    before = next(seen)
    stream, found = episodes.begin(before.day), 0
    for one in seen:
        between = None if one.hours is None or before.hours is None else one.hours - before.hours
        gap = episodes.powered_between(days=one.day - before.day - 1, hours=between)
        stream = episodes.next_day(stream, day=one.day, exposure=1 + gap, norm_per_day=norm.per_day)
        if increments.step(before.count, one.count, may_fall=False).rise:
            stream = episodes.rise(stream, norm_per_day=norm.per_day)
            if stream.ledger.evidence >= norm.threshold:
                found += 1
                stream = replace(stream, ledger=ledger.empty())
        before = one
    return found, stream.powered
