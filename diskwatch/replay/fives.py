"""Recorded stretches of traffic gathered into five minutes, and these into days, as the watch does it.

A stretch belongs wholly to the five minutes of its middle; one of five minutes or more stands for itself.
"""

from dataclasses import dataclass, field

from diskwatch.history.traffic import FIVE
from diskwatch.records import IoCounts, IoRollup
from diskwatch.replay.stretches import Stretch
from diskwatch.units import DAY

_Day = tuple[int, list[IoRollup]]


@dataclass(slots=True)
class Fives:
    """One drive's traffic on its way in.

    Attributes:
        until: end of the latest stretch, UTC seconds since 1970; None before the first.
    """

    until: int | None = None
    _slot: int | None = None
    _inside: list[Stretch] = field(default_factory=list)
    _day: int | None = None
    _rollups: list[IoRollup] = field(default_factory=list)

    def add(self, stretch: Stretch) -> list[_Day]:
        """Take in a stretch that does not begin before the one before it ended.

        Returns:
            The UTC day number and the roll-ups of each day that is over now.
        """
        self.until = stretch.at
        if stretch.seconds >= FIVE:
            return [*self._close_five(), *self._take(_rollup([stretch], stretch.at, round(stretch.seconds)))]
        slot = int(stretch.at - stretch.seconds / 2) // FIVE
        ended: list[_Day] = []
        if slot != self._slot:
            ended = self._close_five()
            self._slot = slot
        self._inside.append(stretch)
        return ended

    def rest(self) -> list[_Day]:
        """What is left at the end of all rows, by day."""
        days = self._close_five()
        return days if self._day is None else [*days, (self._day, self._rollups)]

    def _close_five(self) -> list[_Day]:
        if self._slot is None:
            return []
        rollup = _rollup(self._inside, (self._slot + 1) * FIVE, FIVE)
        self._slot, self._inside = None, []
        return self._take(rollup)

    def _take(self, rollup: IoRollup) -> list[_Day]:
        day = (rollup.at - rollup.wall_seconds) // DAY
        ended: list[_Day] = []
        if self._day is not None and day > self._day:
            ended = [(self._day, self._rollups)]
            self._rollups = []
        self._day = day
        self._rollups.append(rollup)
        return ended


def _rollup(inside: list[Stretch], at: int, seconds: int) -> IoRollup:
    sums = [sum(column) for column in zip(*(one.counts for one in inside), strict=True)]
    reads, writes, read_bytes, write_bytes, read_ms, write_ms = sums
    return IoRollup(
        drive=0,
        at=at,
        wall_seconds=seconds,
        covered_ms=round(sum(one.seconds for one in inside) * 1000),
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=read_bytes,
            write_bytes=write_bytes,
            read_ms=read_ms,
            write_ms=write_ms,
            busy_ms=0,
        ),
        longest_read_us=_longest(inside, 0, 4),
        longest_write_us=_longest(inside, 1, 5),
        spans=len(inside),
        reset=False,
    )


def _longest(inside: list[Stretch], operations: int, spent: int) -> int | None:
    """Largest mean time of an operation over one stretch, microseconds."""
    means = [one.counts[spent] * 1000 // one.counts[operations] for one in inside if one.counts[operations]]
    return max(means, default=None)
