"""Slice reads of the probe: requests of 256 KiB back to back, each of which tests 64 units of the surface.

Streaming is nearly even, about 2 ms a request, and a single unit that has to be retried holds its request up by
at least one turn. A request is late where it takes more than half a turn longer than its neighbours, and its
place in the slice says where the trouble lies. Late requests go into the ledger of late reads
(`diskwatch.trends.late_reads`), which holds them to the same norm. (Model figures of our own study; whether a
drive's read-ahead hides a turn only hardware can tell.) Meaningful on rotating disks alone.
"""

from collections.abc import Sequence

from diskwatch.trends.middle import median

_AROUND = 7  # neighbours on either side


def turn_ms(rotation_rpm: float) -> float:
    """How long one turn takes, in milliseconds.

    Raises:
        ValueError: the number of turns a minute is not above 0.
    """
    if not rotation_rpm > 0:
        raise ValueError(f"a disk that turns {rotation_rpm} times a minute has no turn")
    return 60_000 / rotation_rpm


def late_requests(times_ms: Sequence[float], *, turn: float) -> tuple[int, ...]:
    """Which requests of a slice were late.

    Args:
        times_ms: what each request took, in order of place.
        turn: how long one turn takes, in milliseconds.

    Returns:
        Their places, counted in requests from the start of the slice, 0 first.
    """
    return tuple(
        place
        for place, time in enumerate(times_ms)
        if time > median(times_ms[max(0, place - _AROUND) : place + _AROUND + 1]) + turn / 2
    )
