"""Traffic: looks at the kernel's counters and makes spans of what lies between two looks.

The same looks show which drives stand still.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from diskwatch.machine import counters
from diskwatch.machine.protocol import Counted, Machine
from diskwatch.records import Entry, IoSpan
from diskwatch.service.clocks import JUMP
from diskwatch.service.standstill import Standstill


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """What one look brought.

    Attributes:
        spans: the traffic since the look before, one a drive whose counters can be compared.
        entries: drives that stand still or move again, for the day book.
    """

    spans: tuple[IoSpan, ...] = ()
    entries: tuple[Entry, ...] = ()


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
        self._standstill = Standstill()
        self._broken: set[int] = set()
        self._ours: set[int] = set()

    @property
    def hung(self) -> frozenset[str]:
        """Kernel names of the block devices whose requests do not move; may be asked from any thread."""
        return self._standstill.blocks

    @property
    def troubles(self) -> tuple[str, ...]:
        """The same in one sentence each."""
        return self._standstill.troubles

    def leave_out(self, number: int, *, ours: bool) -> None:
        """Leave a drive out of the next look, since what it does is our doing; for any thread.

        Args:
            number: the drive's.
            ours: whether that is so; False takes it back.
        """
        (self._ours.add if ours else self._ours.discard)(number)

    def look(self, blocks: Mapping[int, tuple[str, ...]]) -> Look:
        """Look once.

        Args:
            blocks: kernel names of each drive's block devices, by the drive's number.

        Returns:
            A span over which the machine slept or its clock was set gives no traffic.
        """
        totals, at, steady = self._machine.counts(), self._now(), self._steady()
        before, (before_at, before_steady) = self._before, self._before_at
        self._before, self._before_at = totals, (at, steady)
        entries = self._standstill.look(totals, blocks, at=at, steady=steady)
        seconds = steady - before_steady
        if not before or seconds <= 0 or abs((at - before_at) - seconds) > JUMP:
            return Look(entries=entries)
        spans = []
        for number, names in sorted(blocks.items()):
            counts = counters.traffic(names, before, totals, elapsed=seconds)
            if counts is None:
                self._broken.add(number)
                continue
            if number in self._ours:
                self._ours.discard(number)
                continue
            reset = number in self._broken
            self._broken.discard(number)
            spans.append(IoSpan(drive=number, at=at, seconds=seconds, counts=counts, reset=reset))
        return Look(spans=tuple(spans), entries=entries)
