"""Load classes: which moments of a disk's work may be compared with each other.

A busier disk is not a slower disk, so times are compared only within a class: how many operations a second, how
large they are, which share of them reads. Never by utilisation, queue or busy time: these are consequences of
slowness, and matching on them would hide it. (Method and cuts: our own study of latency from ordinary traffic.)
"""

from bisect import bisect_right
from collections.abc import Iterable

from diskwatch.records import ClassDay, Direction, IoRollup
from diskwatch.trends.histogram import histogram

RATES = (1.0, 4.0, 16.0, 64.0)
"""Operations a second at which classes part."""

_SMALLEST_OCTAVE, _LARGEST_OCTAVE = 12, 19
"""4 KiB and 512 KiB as powers of two; smaller and larger ones go with these."""

CLASSES = (len(RATES) + 1) * (_LARGEST_OCTAVE - _SMALLEST_OCTAVE + 1) * 3
LEAST_COVERED = 0.8
"""Share of its time that a roll-up must cover; one that a sleep or a gap cut short says too little."""


def load_class(rollup: IoRollup, direction: Direction) -> int | None:
    """The class of a roll-up.

    Returns:
        0 to `CLASSES` - 1, or None where it takes no part: nothing was done in this direction, too little of
        it was measured, or the counters began anew in it.
    """
    operations = rollup.operations(direction)
    measured = rollup.covered_ms >= LEAST_COVERED * rollup.wall_seconds * 1000
    if operations == 0 or rollup.reset or not measured:
        return None
    both = rollup.counts.reads + rollup.counts.writes
    rate = bisect_right(RATES, both * 1000 / rollup.covered_ms)
    # Whole numbers all the way: the octave of 2^k is k, whatever a logarithm would round to.
    octave = (rollup.moved(direction) // operations).bit_length() - 1
    size = min(max(octave, _SMALLEST_OCTAVE), _LARGEST_OCTAVE) - _SMALLEST_OCTAVE
    share = min(3 * rollup.counts.reads // both, 2)
    return (rate * (_LARGEST_OCTAVE - _SMALLEST_OCTAVE + 1) + size) * 3 + share


def class_days(rollups: Iterable[IoRollup]) -> tuple[ClassDay, ...]:
    """One day's roll-ups condensed, one a class and direction that occurred, in order of both."""
    found: dict[tuple[int, Direction], list[IoRollup]] = {}
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
            histogram=histogram(mean for one in members if (mean := one.mean_ms(direction)) is not None),
        )
        for (cls, direction), members in sorted(found.items())
    )
