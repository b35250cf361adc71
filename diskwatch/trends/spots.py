"""The odds rule's score: how much fresh damage, how much still pending, how much old.

    S = b(R) + b(P) + b(V) / 4, and 0 without fresh damage

with R the spots that rose within the last 14 days, P the spots pending now, V the spots replaced so far, and b
the bit length (0, 1, 2-3, 4-7, 8-15 ... give 0, 1, 2, 3, 4 ...): each doubling of fresh damage counts one
point, each doubling of what is pending another, four doublings of the old total one more.

A *spot* is 8 counts as long as every value seen so far is a multiple of 8 (drives with physical sectors of
4,096 bytes count so), else one; a rise keeps the spot size of its day. The rule was chosen on one part and
tested on another of the open daily drive data of 2013 (11,446 data-centre hard drives, 60 of which failed).
"""

from dataclasses import dataclass

WINDOW = 14
"""Days that damage counts as fresh."""

COPY = 28
"""Fourfold score at which the data should be copied off: S of 7."""

RETIRE = 44
"""Fourfold score at which the drive should no longer be relied on: S of 11."""

_COARSE = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Spots:
    """A drive's damage through time; plain values, complete for a restart.

    Attributes:
        replaced: sectors replaced as last read (reallocated, or grown defects); None before the first value.
        pending: sectors pending as last read; None before the first value.
        coarse: True while every value seen so far is a multiple of 8.
        rises: (UTC day number, spots) of each day with a rise within the window, oldest first.
    """

    replaced: int | None = None
    pending: int | None = None
    coarse: bool = True
    rises: tuple[tuple[int, int], ...] = ()


def seen(spots: Spots, *, day: int, replaced: int | None, pending: int | None) -> Spots:
    """Take in a reading.

    Args:
        spots: state before.
        day: UTC day number, not earlier than the one before.
        replaced: sectors replaced, or None where not known this time.
        pending: sectors pending, or None likewise.
    """
    rises = spots.rises
    # Nearly every reading: what it told is known already, and nothing was fresh.
    if not rises and replaced == spots.replaced and pending == spots.pending:
        return spots
    values = [value for value in (replaced, pending) if value is not None]
    coarse = spots.coarse and all(value % _COARSE == 0 for value in values)
    size = _COARSE if coarse else 1
    fresh = _rise(spots.replaced, replaced) + _rise(spots.pending, pending)
    if rises and rises[0][0] <= day - WINDOW:
        rises = tuple((when, count) for when, count in rises if when > day - WINDOW)
    if fresh:
        before = rises[-1][1] if rises and rises[-1][0] == day else 0
        kept = rises[:-1] if before else rises
        rises = (*kept, (day, before + fresh // size))
    return Spots(
        replaced=spots.replaced if replaced is None else replaced,
        pending=spots.pending if pending is None else pending,
        coarse=coarse,
        rises=rises,
    )


def _rise(old: int | None, new: int | None) -> int:
    return 0 if old is None or new is None else max(0, new - old)


def fresh(spots: Spots, day: int) -> int:
    """R: spots that rose within the 14 days up to a day."""
    return sum(count for when, count in spots.rises if when > day - WINDOW)


def fourfold(spots: Spots, day: int) -> int:
    """The score times four, a whole number: ``4 b(R) + 4 b(P) + b(V)``, or 0 without fresh damage."""
    risen = fresh(spots, day)
    if risen == 0:
        return 0
    size = _COARSE if spots.coarse else 1
    pending = (spots.pending or 0) // size
    replaced = (spots.replaced or 0) // size
    return 4 * risen.bit_length() + 4 * pending.bit_length() + replaced.bit_length()
