"""A drive's traffic in words: how many requests, how many bytes, how long one took."""

from diskwatch.records import IoSpan
from diskwatch.units import say_bytes, say_count

_SHORTEST = 0.001
"""A span of less than a millisecond gives no rate, only noise."""


def traffic(span: IoSpan | None) -> tuple[str, ...]:
    """What a drive is doing now, from the fullest wording to the shortest.

    Args:
        span: its traffic over the last span; None where nobody measures it.

    Returns:
        Wordings such as ``reads 12/s 1.4 MB/s 6.2 ms  writes 3/s 120 kB/s``. The milliseconds are what one
        request took in the mean. The fullest ends with the share of the time in which the drive was busy.
    """
    if span is None:
        return ("traffic not measured", "not measured")
    if span.seconds < _SHORTEST:
        return ("traffic not known yet",)
    counts = span.counts
    if counts.reads <= 0 and counts.writes <= 0:
        return ("no traffic",)
    reads = _Way("reads", counts.reads, counts.read_bytes, counts.read_ms, span.seconds)
    writes = _Way("writes", counts.writes, counts.write_bytes, counts.write_ms, span.seconds)
    busy = min(counts.busy_ms / (10 * span.seconds), 100.0)
    return (
        f"{reads.full}  {writes.full}  busy {_small(busy)} % of the time",
        f"{reads.full}  {writes.without_time}",
        f"{reads.full}  {writes.bare}",
        f"{reads.without_bytes}  {writes.bare}",
        reads.without_bytes if counts.reads > 0 else writes.bare,
    )


class _Way:
    """One direction of the traffic, in four lengths."""

    def __init__(self, name: str, requests: int, size: int, took_ms: int, seconds: float) -> None:
        if requests <= 0:
            self.full = self.without_time = self.without_bytes = self.bare = f"no {name}"
            return
        amount = f"{say_bytes(max(int(size / seconds), 0))}/s"
        took = f"{_small(took_ms / requests)} ms"
        self.bare = f"{name} {_small(requests / seconds)}/s"
        self.without_time = f"{self.bare} {amount}"
        self.without_bytes = f"{self.bare} {took}"
        self.full = f"{self.bare} {amount} {took}"


def _small(amount: float) -> str:
    """A rate with one decimal below ten; one that would round to nothing is not told as nothing."""
    if 0 < amount < 0.05:
        return "<0.1"
    if amount < 9.95:
        return f"{amount:.1f}".removesuffix(".0")
    return say_count(round(amount))
