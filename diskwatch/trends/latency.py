"""Latency from ordinary traffic: five minutes at a time into days, days into evidence.

A busier disk is not a slower disk, so times are compared at equal load only (`diskwatch.trends.load`), with
the drive's own past (`diskwatch.trends.references`), a day at a time (`diskwatch.trends.shift`), and the days
add up in a ledger (`diskwatch.trends.slowness`). Six to seven weeks pass before there is any evidence: about
twelve days for a class, then twenty scored ones.

After a move to another port or host, new firmware or changed encryption the drive's usual times are others: new
references begin (`moved`), which hides a decline that is under way, so nothing else may restart them, and each
restart belongs in the day book. The old ones are laid aside and go on where the drive comes back.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from diskwatch.records import Direction, IoRollup
from diskwatch.trends.shift import DayShift
from diskwatch.trends.slowness import Slowness, accepted, after_day
from diskwatch.trends.today import Today, arrived, day_of, over, unpacked

LAID_ASIDE = 4
"""Earlier circumstances whose references are kept; the oldest make room."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Aside:
    """What was learnt of a drive under earlier circumstances.

    Attributes:
        key: what names the circumstances.
        reads: as it stood when they ended.
        writes: the same of writes.
    """

    key: str
    reads: Slowness = field(default_factory=Slowness)
    writes: Slowness = field(default_factory=Slowness)


@dataclass(frozen=True, slots=True, kw_only=True)
class Latency:
    """One drive's latency through time; plain values, complete for a restart.

    Attributes:
        key: names the circumstances that references hold for: port, host, firmware, encryption.
        today: the open day.
        reads: evidence on reads.
        writes: evidence on writes.
        aside: earlier circumstances, the latest last.
    """

    key: str = ""
    today: Today = field(default_factory=Today)
    reads: Slowness = field(default_factory=Slowness)
    writes: Slowness = field(default_factory=Slowness)
    aside: tuple[Aside, ...] = ()

    def of(self, direction: Direction) -> Slowness:
        """One direction."""
        return self.reads if direction is Direction.READ else self.writes


def begin(key: str = "") -> Latency:
    """A drive whose traffic has not been seen.

    Args:
        key: names the circumstances; any text that differs where references must.
    """
    return Latency(key=key)


def ends_day(latency: Latency, rollup: IoRollup) -> bool:
    """Whether a roll-up belongs to a later day than the open one, so that `close_day` comes first."""
    return latency.today.day is not None and day_of(rollup) > latency.today.day


def arrive(latency: Latency, rollup: IoRollup) -> Latency:
    """Take in one roll-up; bad, doubled and overlapping ones change nothing (`diskwatch.trends.today`).

    Args:
        latency: state before.
        rollup: of this drive, in order of time.

    Raises:
        ValueError: it belongs to a later day than the open one, which has not been closed (`ends_day`).
    """
    return Latency(
        key=latency.key,
        today=arrived(latency.today, rollup),
        reads=latency.reads,
        writes=latency.writes,
        aside=latency.aside,
    )


def close_day(latency: Latency, *, temperature: float | None = None) -> tuple[Latency, tuple[DayShift, ...]]:
    """Close the open day.

    Args:
        latency: state before.
        temperature: the drive's usual temperature on that day, degrees Celsius, or None where not known.

    Returns:
        The state after it, and how reads and writes of that day compare: two shifts, or none where no day was
        open.
    """
    today = latency.today
    if today.day is None:
        return latency, ()
    reads, read_shift = after_day(
        latency.reads,
        unpacked(today.reads),
        day=today.day,
        direction=Direction.READ,
        temperature=temperature,
    )
    writes, write_shift = after_day(
        latency.writes,
        unpacked(today.writes),
        day=today.day,
        direction=Direction.WRITE,
        temperature=temperature,
    )
    return replace(latency, today=over(today), reads=reads, writes=writes), (read_shift, write_shift)


def moved(latency: Latency, key: str) -> Latency:
    """The state under other circumstances; those of a key that was left before go on where they were.

    The open day is given up, since nobody can tell which of its times belong to which circumstances.

    Args:
        latency: state before.
        key: names the circumstances from now on.
    """
    if key == latency.key:
        return latency
    left = Aside(key=latency.key, reads=latency.reads, writes=latency.writes)
    known = next((one for one in latency.aside if one.key == key), Aside(key=key))
    others = tuple(one for one in latency.aside if one.key not in {key, latency.key})
    return Latency(
        key=key,
        today=over(latency.today),
        reads=known.reads,
        writes=known.writes,
        aside=(*others, left)[-LAID_ASIDE:],
    )


def acknowledged(latency: Latency, direction: Direction) -> Latency:
    """The state after the owner has taken note of an alarm in one direction (`slowness.accepted`)."""
    if direction is Direction.READ:
        return replace(latency, reads=accepted(latency.reads))
    return replace(latency, writes=accepted(latency.writes))


def evidence(latency: Latency) -> Mapping[Direction, float]:
    """M in days of watching, by direction; a direction that is still being learnt is left out."""
    found = {direction: latency.of(direction).evidence for direction in Direction}
    return {direction: days for direction, days in found.items() if days is not None}
