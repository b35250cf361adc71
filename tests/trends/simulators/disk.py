"""An invented disk of 7,200 turns a minute and its owner: five-minute roll-ups of years of ordinary work.

All figures are inventions in the range of such disks (common practice, no source). The owner does five kinds
of work in sticky succession; the load wanders through day and week; queues grow with it; times scatter, less
over many reads; days have a pace of their own that resembles the day before; now and then a read takes seconds;
there are weeks without work. Now and then the work itself changes, openly (another mix, another load) and,
where asked, in ways that no counter shows: how far the arm travels and how much comes from a cache.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import exp, log, pi, sin, sqrt
from random import Random

from diskwatch.records import IoCounts, IoRollup
from diskwatch.units import DAY


@dataclass(frozen=True, slots=True, kw_only=True)
class Work:
    """One kind of work.

    Attributes:
        kib: mean size of a read, KiB.
        reads: share of operations that read.
        sequential: share of reads without a seek.
        cached: share of reads that the machine's or the disk's memory answers.
        stroke: how far the arm travels for a seek, as a part of the full way.
        load: natural logarithm of operations a second, relative to the owner's usual.
    """

    kib: float
    reads: float
    sequential: float
    cached: float
    stroke: float
    load: float


WORKS = (
    Work(kib=18, reads=0.62, sequential=0.25, cached=0.25, stroke=0.35, load=0.0),
    Work(kib=9, reads=0.45, sequential=0.10, cached=0.45, stroke=0.20, load=0.9),
    Work(kib=210, reads=0.90, sequential=0.85, cached=0.10, stroke=0.15, load=0.2),
    Work(kib=400, reads=0.50, sequential=0.75, cached=0.05, stroke=0.70, load=1.3),
    Work(kib=5, reads=0.75, sequential=0.05, cached=0.35, stroke=0.55, load=1.6),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class World:
    """What changes for the owner, and for the disk.

    Attributes:
        visible: whether the work changes openly, about every 170 days.
        heavy: natural logarithm by which the owner's load lies above the usual.
        hidden: whether such a change also moves stroke and cache, which no counter shows.
        adds_up: True where each hidden change comes on top of those before it, False where each replaces them.
        day_noise: spread of a day's own pace, as a natural logarithm.
        season: swing of times over the year, as a natural logarithm.
        begins: day from which the disk is slower; None for never.
        slower: times as long as before, from that day on.
        ramp: days over which the slowness grows to that; 0 for at once.
        retried: share of reads that take ten turns more, from that day on.
    """

    visible: bool = False
    heavy: float = 0.0
    hidden: bool = False
    adds_up: bool = False
    day_noise: float = 0.05
    season: float = 0.0
    begins: int | None = None
    slower: float = 1.0
    ramp: int = 0
    retried: float = 0.0


STEADY = World()
VISIBLE = World(visible=True)
HIDDEN = World(visible=True, hidden=True)

_TURN = 60_000 / 7200
_CHANGE_DAYS = 170
_LIKE_THE_DAY_BEFORE = 0.6
_KEEP_WORK = 0.93


@dataclass(frozen=True, slots=True, kw_only=True)
class _Owner:
    """What the owner does nowadays."""

    mix: tuple[float, ...]
    usual: float
    load: float
    hours: float
    weekend: float
    works: tuple[Work, ...]


def _owner(chance: Random, world: World) -> _Owner:
    usual = chance.gauss(0.8, 0.7) + world.heavy
    return _Owner(
        mix=tuple(chance.gammavariate(0.8, 1) + 0.02 for _ in WORKS),
        usual=usual,
        load=usual,
        hours=chance.uniform(6, 12),
        weekend=chance.uniform(0.1, 0.9),
        works=WORKS,
    )


def _changed(owner: _Owner, chance: Random, world: World) -> _Owner:
    works = owner.works
    if world.hidden:
        far, cache = exp(chance.gauss(0, 0.15)), chance.gauss(0, 0.05)
        works = tuple(
            replace(one, stroke=min(1.0, one.stroke * far), cached=min(0.8, max(0.0, one.cached + cache)))
            for one in (owner.works if world.adds_up else WORKS)
        )
    mix = tuple(chance.gammavariate(0.8, 1) + 0.02 for _ in WORKS)
    return replace(owner, mix=mix, load=owner.usual + chance.gauss(0, 1), works=works)


def days(chance: Random, count: int, world: World, *, first: int = 0) -> Iterator[list[IoRollup]]:
    """The roll-ups of each day on which there is work.

    Args:
        chance: where all randomness comes from.
        count: days.
        world: what changes.
        first: UTC day number of the first day.
    """
    owner = _owner(chance, world)
    pace, away, phase = 0.0, 0, chance.random()
    for day in range(count):
        if world.visible and chance.random() < 1 / _CHANGE_DAYS:
            owner = _changed(owner, chance, world)
        pace = _LIKE_THE_DAY_BEFORE * pace + chance.gauss(
            0, world.day_noise * sqrt(1 - _LIKE_THE_DAY_BEFORE**2)
        )
        away = away - 1 if away > 0 else int(chance.random() < 1 / 120) * chance.randint(3, 16)
        idle = day % 7 >= 5 and chance.random() > owner.weekend
        if away or idle:
            continue
        season = world.season * sin(2 * pi * (day / 365.25 + phase))
        wear, retried = _worn(world, day)
        yield list(_day(chance, owner, first + day, pace + season + wear, retried))


def _worn(world: World, day: int) -> tuple[float, float]:
    """Natural logarithm of the slowness on a day, and the share of reads that are retried."""
    if world.begins is None or day < world.begins:
        return 0.0, 0.0
    grown = min(1.0, (day - world.begins + 1) / world.ramp) if world.ramp else 1.0
    return log(1 + (world.slower - 1) * grown), world.retried


def _day(chance: Random, owner: _Owner, day: int, pace: float, retried: float) -> Iterator[IoRollup]:
    slots = max(6, round(owner.hours * 12 * chance.uniform(0.7, 1.2)))
    first = chance.randint(84, 120)
    kinds = range(len(owner.works))
    kind = chance.choices(kinds, owner.mix)[0]
    load = chance.gauss(0, 0.6)
    for slot in range(first, min(288, first + slots)):
        if chance.random() > _KEEP_WORK:
            kind = chance.choices(kinds, owner.mix)[0]
        load = 0.9 * load + chance.gauss(0, 0.26)
        if chance.random() < 0.35:
            continue
        bend = 0.4 * sin(pi * (slot - first) / slots)
        yield _rollup(
            chance,
            owner.works[kind],
            owner.load + load + bend,
            begins=day * DAY + slot * 300,
            pace=pace,
            retried=retried,
        )


def _rollup(chance: Random, work: Work, load: float, *, begins: int, pace: float, retried: float) -> IoRollup:
    kib = work.kib * exp(chance.gauss(0, 0.25))
    seek = (1 - work.sequential) * (0.8 + 9 * sqrt(work.stroke) + _TURN / 2)
    each = (1 - work.cached) * (seek + kib / 150) + work.cached * 0.1
    wanted = exp(load + work.load)
    # No disk does more than it has time for; at nine tenths of it, work waits elsewhere.
    busy = min(0.9, wanted * each / 1000)
    operations = max(1, round(300_000 * busy / each))
    reads = (
        sum(chance.random() < work.reads for _ in range(operations))
        if operations < 12
        else round(operations * work.reads)
    )
    writes = operations - reads
    queue = 1 + 0.8 * busy / (1 - busy)
    scatter = chance.gauss(0, sqrt(0.05**2 + 0.8**2 / max(1, reads)))
    read_ms = reads * (each * queue * exp(pace + scatter) + retried * 10 * _TURN)
    longest = 0
    if reads and chance.random() < 0.002:
        spike = chance.uniform(1000, 4000)
        read_ms += spike
        longest = round(spike * 1000)
    # Writes go to a cache that is emptied now and then: short, with a long and changeable tail.
    write_ms = writes * exp(chance.gauss(0.5, 0.5 + 0.3 / sqrt(max(1, writes)))) * queue * exp(pace)
    return IoRollup(
        drive=1,
        at=begins + 300,
        wall_seconds=300,
        covered_ms=300_000,
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=round(reads * kib * 1024),
            write_bytes=round(writes * kib * 600),
            read_ms=round(read_ms),
            write_ms=round(write_ms),
            busy_ms=round(300_000 * busy),
        ),
        longest_read_us=longest or None,
        longest_write_us=None,
        spans=30,
        reset=False,
    )
