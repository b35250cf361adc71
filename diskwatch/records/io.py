"""What the kernel counts about a drive's traffic."""

from dataclasses import dataclass


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
    """

    drive: int
    at: int
    seconds: float
    counts: IoCounts
