"""Load classes: which moments of a disk's work may be compared with each other.

A busier disk is not a slower disk, so times are compared only within a class: how many operations a second, how
large they are, which share of them reads. Never by utilisation, queue or busy time: these are consequences of
slowness, and matching on them would hide it. (Method and cuts: our own study of latency from ordinary traffic.)
"""

from bisect import bisect_right
from collections.abc import Iterable
from dataclasses import dataclass
from enum import IntEnum

from diskwatch.trends.histogram import histogram

RATES = (1.0, 4.0, 16.0, 64.0)
"""Operations a second at which classes part."""

_SMALLEST_OCTAVE, _LARGEST_OCTAVE = 12, 19
"""4 KiB and 512 KiB as powers of two; smaller and larger ones go with these."""

CLASSES = (len(RATES) + 1) * (_LARGEST_OCTAVE - _SMALLEST_OCTAVE + 1) * 3
LEAST_COVERED = 0.8
"""Share of its time that a roll-up must cover; one that a sleep or a gap cut short says too little."""


class Direction(IntEnum):
    """Which operations: reads and writes have classes and times of their own."""

    READ = 0
    WRITE = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Rollup:
    """Traffic of one drive over one stretch of time.

    Attributes:
        wall_seconds: how long the stretch is.
        covered_ms: time in it that was measured, milliseconds.
        reads: read requests completed.
        writes: write requests completed.
        read_bytes: bytes read.
        write_bytes: bytes written.
        read_ms: time that reads took, summed over requests, milliseconds.
        write_ms: the same of writes.
        reset: whether the counters began anew within it.
    """

    wall_seconds: int
    covered_ms: int
    reads: int
    writes: int
    read_bytes: int
    write_bytes: int
    read_ms: int
    write_ms: int
    reset: bool = False

    def operations(self, direction: Direction) -> int:
        """Operations in a direction."""
        return self.reads if direction is Direction.READ else self.writes

    def mean_ms(self, direction: Direction) -> float:
        """Mean time of an operation in a direction that had some, milliseconds."""
        spent = self.read_ms if direction is Direction.READ else self.write_ms
        return spent / self.operations(direction)


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassDay:
    """One day of one drive in one class and direction.

    Attributes:
        load_class: the class, 0 to `CLASSES` - 1.
        direction: reads or writes.
        rollups: how many stretches of time fell into it.
        operations: operations in this direction, all of them together.
        histogram: mean times of the stretches in milliseconds, counts by bin.
    """

    load_class: int
    direction: Direction
    rollups: int
    operations: int
    histogram: dict[int, int]


def load_class(rollup: Rollup, direction: Direction) -> int | None:
    """The class of a stretch of time.

    Returns:
        0 to `CLASSES` - 1, or None where it takes no part: nothing was done in this direction, too little of
        it was measured, or the counters began anew in it.
    """
    operations = rollup.operations(direction)
    measured = rollup.covered_ms >= LEAST_COVERED * rollup.wall_seconds * 1000
    if operations == 0 or rollup.reset or not measured:
        return None
    both = rollup.reads + rollup.writes
    rate = bisect_right(RATES, both * 1000 / rollup.covered_ms)
    moved = rollup.read_bytes if direction is Direction.READ else rollup.write_bytes
    # Whole numbers all the way: the octave of 2^k is k, whatever a logarithm would round to.
    octave = (moved // operations).bit_length() - 1
    size = min(max(octave, _SMALLEST_OCTAVE), _LARGEST_OCTAVE) - _SMALLEST_OCTAVE
    share = min(3 * rollup.reads // both, 2)
    return (rate * (_LARGEST_OCTAVE - _SMALLEST_OCTAVE + 1) + size) * 3 + share


def class_days(rollups: Iterable[Rollup]) -> tuple[ClassDay, ...]:
    """One day's stretches condensed, one a class and direction that occurred, in order of both."""
    found: dict[tuple[int, Direction], list[Rollup]] = {}
    for rollup in rollups:
        for direction in Direction:
            cls = load_class(rollup, direction)
            if cls is not None:
                found.setdefault((cls, direction), []).append(rollup)
    return tuple(
        ClassDay(
            load_class=cls,
            direction=direction,
            rollups=len(members),
            operations=sum(one.operations(direction) for one in members),
            histogram=histogram(one.mean_ms(direction) for one in members),
        )
        for (cls, direction), members in sorted(found.items())
    )
