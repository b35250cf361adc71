"""How fast a drive has really been read, from the stretches in which it was read in bulk. Pure."""

from collections.abc import Iterable
from dataclasses import dataclass

from diskwatch.records import IoRollup
from diskwatch.trends.load import LEAST_COVERED

LEAST_STRETCHES = 3
"""Five-minute stretches below which nothing is concluded."""

_BUSY = 0.5
_READING = 0.8
_BULK_BYTES = 64 * 1024
"""A stretch counts where the drive was busy for half of it at least, four fifths of what it moved was read, and
a request took 64 KiB or more on average: what copying whole files looks like. (Our own proposal.)"""

_LOW, _HIGH = 0.1, 0.9


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadRate:
    """How fast a drive may be expected to be read.

    Attributes:
        low: bytes a second; of what was measured, nine tenths was faster.
        high: bytes a second; of what was measured, nine tenths was slower.
        stretches: five-minute stretches that it rests on; 0 where it was not measured at this drive.
    """

    low: float
    high: float
    stretches: int


def read_rate(rollups: Iterable[IoRollup], *, turns: bool) -> ReadRate | None:
    """The rates that a drive has given while it was read in bulk.

    Args:
        rollups: its traffic by five minutes.
        turns: whether it has platters: their innermost tracks give about half of what the outermost give
            (common practice, no source), and where the data lay that was read is not known.

    Returns:
        The rates, or None where it was read in bulk too seldom to say.
    """
    rates = sorted(rate for one in rollups if (rate := _rate(one)) is not None)
    if len(rates) < LEAST_STRETCHES:
        return None
    low, high = _quantile(rates, _LOW), _quantile(rates, _HIGH)
    return ReadRate(low=min(low, high / 2) if turns else low, high=high, stretches=len(rates))


def _rate(rollup: IoRollup) -> float | None:
    counts = rollup.counts
    moved = counts.read_bytes + counts.write_bytes
    if rollup.reset or rollup.covered_ms < LEAST_COVERED * rollup.wall_seconds * 1000 or counts.reads == 0:
        return None
    bulk = counts.read_bytes >= _BULK_BYTES * counts.reads
    if not bulk or counts.busy_ms < _BUSY * rollup.covered_ms or counts.read_bytes < _READING * moved:
        return None
    # Over its busy time: a copy leaves a drive no rest, and what it read may have begun halfway through.
    return counts.read_bytes * 1000 / counts.busy_ms


def _quantile(ordered: list[float], share: float) -> float:
    """Between the two nearest of an ordered list (Hyndman and Fan 1996, definition 7)."""
    place = share * (len(ordered) - 1)
    below = int(place)
    above = min(below + 1, len(ordered) - 1)
    return ordered[below] + (place - below) * (ordered[above] - ordered[below])
