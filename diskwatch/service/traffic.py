"""Traffic: looks at the kernel's counters and makes spans of what lies between two looks."""

from collections.abc import Callable, Mapping

from diskwatch.machine import counters
from diskwatch.machine.protocol import Counted, Machine
from diskwatch.records import IoSpan

JUMP = 5.0
"""Seconds by which the clock and the steady clock may differ over a span; beyond, it slept or was set."""


class Traffic:
    """Remembers the last look; belongs to one thread."""

    def __init__(self, machine: Machine, now: Callable[[], int], steady: Callable[[], float]) -> None:
        """Begin.

        Args:
            machine: whose counters to look at.
            now: UTC seconds since 1970.
            steady: seconds of a clock that only moves forward and stands still while the machine sleeps.
        """
        self._machine = machine
        self._now = now
        self._steady = steady
        self._before: Mapping[str, Counted] = {}
        self._before_at = (0, 0.0)

    def look(self, blocks: Mapping[int, tuple[str, ...]]) -> tuple[IoSpan, ...]:
        """Look once.

        Args:
            blocks: kernel names of each drive's block devices, by the drive's number.

        Returns:
            The spans since the look before, one a drive whose counters can be compared. A span over which the
            machine slept or its clock was set gives nothing.
        """
        totals, at, steady = self._machine.counts(), self._now(), self._steady()
        before, (before_at, before_steady) = self._before, self._before_at
        self._before, self._before_at = totals, (at, steady)
        seconds = steady - before_steady
        if not before or seconds <= 0 or abs((at - before_at) - seconds) > JUMP:
            return ()
        spans = []
        for number, names in sorted(blocks.items()):
            counts = counters.traffic(names, before, totals, elapsed=seconds)
            if counts is not None:
                spans.append(IoSpan(drive=number, at=at, seconds=seconds, counts=counts))
        return tuple(spans)
