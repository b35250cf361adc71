"""What the kernel counts about a drive's traffic."""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntEnum


@dataclass(frozen=True, slots=True, kw_only=True)
class IoCounts:
    """Totals since the device appeared, or their differences over a span.

    Attributes:
        reads: read requests completed (failed ones count too).
        writes: write requests completed.
        read_bytes: bytes read.
        write_bytes: bytes written.
        read_ms: time that reads took, summed over requests, milliseconds.
        write_ms: the same of writes.
        busy_ms: time in which at least one request was under way, milliseconds.
        discards: discard requests completed; None where the kernel does not count them, or nobody kept them.
        discard_bytes: bytes discarded, or None likewise.
        discard_ms: time that discards took, summed over requests, milliseconds, or None likewise.
        flushes: flush requests completed, or None likewise; they are no reads and no writes.
        flush_ms: time that flushes took, summed over requests, milliseconds, or None likewise.
    """

    reads: int
    writes: int
    read_bytes: int
    write_bytes: int
    read_ms: int
    write_ms: int
    busy_ms: int
    discards: int | None = None
    discard_bytes: int | None = None
    discard_ms: int | None = None
    flushes: int | None = None
    flush_ms: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class IoSpan:
    """A drive's traffic over one span of time.

    Attributes:
        drive: the drive's number in the history.
        at: end of the span, UTC seconds since 1970.
        seconds: how long the span was by a clock that only moves forward.
        counts: differences over the span, none negative.
        reset: whether the counters began anew just before it, so that what came in between was not counted.
    """

    drive: int
    at: int
    seconds: float
    counts: IoCounts
    reset: bool = False


class Direction(IntEnum):
    """Which operations; the numbers stand in the history."""

    READ = 0
    WRITE = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class IoRollup:
    """A drive's traffic over five minutes, rolled up from its spans.

    Attributes:
        drive: the drive's number in the history.
        at: end of the five minutes, UTC seconds since 1970.
        wall_seconds: how long that stretch is by the clock.
        covered_ms: time in it that was measured, milliseconds.
        counts: differences summed over its spans.
        longest_read_us: largest mean time of a read over one span, microseconds; None where there was none.
        longest_write_us: the same of writes.
        spans: how many spans it has.
        reset: whether counters began anew within it.
    """

    drive: int
    at: int
    wall_seconds: int
    covered_ms: int
    counts: IoCounts
    longest_read_us: int | None
    longest_write_us: int | None
    spans: int
    reset: bool

    def operations(self, direction: Direction) -> int:
        """Operations in a direction."""
        return self.counts.reads if direction is Direction.READ else self.counts.writes

    def moved(self, direction: Direction) -> int:
        """Bytes moved in a direction."""
        return self.counts.read_bytes if direction is Direction.READ else self.counts.write_bytes

    def mean_ms(self, direction: Direction) -> float | None:
        """Mean time of an operation in a direction, milliseconds; None where there was none."""
        operations = self.operations(direction)
        spent = self.counts.read_ms if direction is Direction.READ else self.counts.write_ms
        return spent / operations if operations else None


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassDay:
    """One day of a drive in one class of load and one direction, kept for ever.

    Attributes:
        load_class: the class, see `diskwatch.trends.load`.
        direction: reads or writes.
        rollups: how many roll-ups fell into it.
        operations: operations in this direction, all of them together.
        histogram: mean times of the roll-ups in milliseconds, counts by bin of `diskwatch.trends.histogram`.
    """

    load_class: int
    direction: Direction
    rollups: int
    operations: int
    histogram: Mapping[int, int]
