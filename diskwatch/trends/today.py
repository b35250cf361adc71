"""The open day of a drive's latency: what of its traffic can be compared, gathered as it arrives."""

from dataclasses import dataclass, replace
from math import log
from struct import Struct

from diskwatch.records import Direction, IoRollup
from diskwatch.trends.load import load_class
from diskwatch.units import DAY

SHORTEST = 60
"""Seconds below which a stretch is no roll-up: its means are too noisy, and a day holds too many of them."""

_PACKING = Struct("<Bh")
_SPIN_UP_US = 1_000_000
_REST = 300
"""Seconds without an operation after which a drive may have spun down.

Drives rest after ten minutes at the earliest (common practice, no source). Roll-ups of five minutes show ten
idle minutes as five to fifteen empty ones, hence five.
"""


@dataclass(frozen=True, slots=True, kw_only=True)
class Today:
    """The day that is open; plain values, complete for a restart.

    Attributes:
        day: UTC day number; None before the first roll-up of a day.
        until: end of the latest roll-up, UTC seconds since 1970, or None.
        busy_until: end of the latest one with any operation, or None.
        reads: what took part, packed (`packed`), in order of arrival.
        writes: the same of writes.
    """

    day: int | None = None
    until: int | None = None
    busy_until: int | None = None
    reads: bytes = b""
    writes: bytes = b""


def day_of(rollup: IoRollup) -> int:
    """The UTC day that a roll-up begins on."""
    return (rollup.at - rollup.wall_seconds) // DAY


def arrived(today: Today, rollup: IoRollup) -> Today:
    """The open day after one more roll-up.

    One that was taken in already, that overlaps another, that is shorter than a minute or impossible changes
    nothing. One from days before the open one says that the clock was set back: the open day begins anew.

    Args:
        today: state before.
        rollup: of this drive, in order of time.

    Raises:
        ValueError: it belongs to a later day than the open one, which has not been closed.
    """
    counts = rollup.counts
    begins = rollup.at - rollup.wall_seconds
    day = begins // DAY
    if rollup.wall_seconds < SHORTEST or not _possible(rollup):
        return today
    if today.day is not None and day > today.day:
        raise ValueError(f"a roll-up of day {day} came while day {today.day} is open; close that day first")
    if today.until is not None and begins < today.until:
        if begins >= today.until - 2 * DAY:
            return today
        today = Today()
    reads, writes = today.reads, today.writes
    if not _spun_up(rollup, today.busy_until):
        if (found := load_class(rollup, Direction.READ)) is not None:
            reads += packed(found, counts.read_ms, counts.reads)
        if (found := load_class(rollup, Direction.WRITE)) is not None:
            writes += packed(found, counts.write_ms, counts.writes)
    busy_until = rollup.at if counts.reads or counts.writes else today.busy_until
    return Today(day=day, until=rollup.at, busy_until=busy_until, reads=reads, writes=writes)


def over(today: Today) -> Today:
    """The state between two days: nothing gathered, but the latest traffic is remembered."""
    return replace(today, day=None, reads=b"", writes=b"")


def _possible(rollup: IoRollup) -> bool:
    counts = rollup.counts
    return (
        counts.reads >= 0
        and counts.writes >= 0
        and counts.read_bytes >= 0
        and counts.write_bytes >= 0
        and counts.read_ms >= 0
        and counts.write_ms >= 0
    )


def _spun_up(rollup: IoRollup, busy_until: int | None) -> bool:
    """Whether the roll-up holds the wait for a drive to spin up."""
    longest = max(rollup.longest_read_us or 0, rollup.longest_write_us or 0)
    if longest < _SPIN_UP_US:
        return False
    return busy_until is None or rollup.at - rollup.wall_seconds - busy_until >= _REST


def packed(of_class: int, spent_ms: int, operations: int) -> bytes:
    """A class and a mean time in three bytes: a day's work is copied with every roll-up that arrives.

    Args:
        of_class: the load class, 0 to 119.
        spent_ms: time that the operations took, summed, milliseconds; the kernel tells whole ones, so 0 means
            less than 1.
        operations: how many they were, at least 1.

    Returns:
        The class, and a thousand times the natural logarithm of the mean time in milliseconds; beyond 2^15 of
        these the time is years, and it stays at that.
    """
    return _PACKING.pack(of_class, min(0x7FFF, round(1000 * log(max(spent_ms, 0.5) / operations))))


def unpacked(work: bytes) -> tuple[tuple[int, int], ...]:
    """Pairs of a load class and a thousandfold logarithm of a mean time in milliseconds."""
    return tuple(_PACKING.iter_unpack(work))
