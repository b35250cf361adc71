"""What people do with a machine: hours, weeks, backups, holidays, and habits that change.

A drive meets one of five kinds of activity at a time, each with its own size of request, sequential share,
cache hits and stroke, and stays with it for a while; the load wanders (its logarithm is an AR(1) process) below
a curve of the day and the week. Every few months the mix and the load change, as a person's work does. All
figures are common practice, no source.
"""

from dataclasses import dataclass, replace
from math import exp, sqrt
from random import Random
from typing import Literal

from diskwatch.rehearsal.rotating import Mix
from diskwatch.units import DAY

Habit = Literal["office", "home", "studio", "server"]

BLOCK = 512
"""Bytes of a logical block; every request is a whole number of them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Activity:
    """Sizes are KiB a read and a write, reads the share of them among requests, pace requests a second."""

    read: float
    write: float
    sequential: float
    cached: float
    stroke: float
    reads: float
    pace: float


_ACTIVITIES = (
    # documents and mail; small records; pictures and film; starting programs; moving files
    _Activity(read=16, write=8, sequential=0.25, cached=0.45, stroke=0.25, reads=0.65, pace=6.0),
    _Activity(read=8, write=4, sequential=0.10, cached=0.30, stroke=0.15, reads=0.55, pace=12.0),
    _Activity(read=128, write=256, sequential=0.85, cached=0.20, stroke=0.05, reads=0.85, pace=10.0),
    _Activity(read=32, write=8, sequential=0.50, cached=0.35, stroke=0.40, reads=0.80, pace=8.0),
    _Activity(read=64, write=64, sequential=0.60, cached=0.10, stroke=0.60, reads=0.40, pace=5.0),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Hours:
    on: tuple[int, int]
    weekend: bool
    busy: tuple[int, int]
    rest: float


_HABITS: dict[str, _Hours] = {
    "office": _Hours(on=(7, 19), weekend=False, busy=(8, 18), rest=0.2),
    "home": _Hours(on=(8, 24), weekend=True, busy=(17, 23), rest=0.3),
    "studio": _Hours(on=(0, 24), weekend=True, busy=(9, 22), rest=0.05),
    "server": _Hours(on=(0, 24), weekend=True, busy=(8, 20), rest=0.4),
}

_STAYS = 3_600.0
"""Seconds after which an activity has given way to another in two of three cases."""

_WANDERS = 21_600.0
_WANDER = 0.6
"""Seconds over which the load forgets itself, and how far its logarithm wanders."""

_CHANGES_DAYS = 170.0
"""Mean days between two changes of habit."""

_COPY_SIZE = 524_288
_COPY_PACE = 60e6
"""Bytes a second that a backup moves: as fast as a network or an old disk lets it."""

_MOST_COPIED = 4_000_000_000_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Work:
    """What a drive was asked for over a span.

    Attributes:
        reads: read requests.
        writes: write requests.
        reading: what the reads were like.
        writing: what the writes were like.
        direct: whether each waited for the one before, as in a copy.
    """

    reads: int = 0
    writes: int = 0
    reading: Mix
    writing: Mix
    direct: bool = False

    @property
    def read_bytes(self) -> int:
        """Bytes read."""
        return self.reads * self.reading.size

    @property
    def write_bytes(self) -> int:
        """Bytes written."""
        return self.writes * self.writing.size


_NONE = Mix(size=BLOCK, sequential=0, cached=0, stroke=0)
NOTHING = Work(reading=_NONE, writing=_NONE)


def is_on(habit: Habit, at: int, *, away: bool) -> bool:
    """Whether a machine of such a habit is switched on.

    Args:
        habit: whose.
        at: when, UTC seconds since 1970.
        away: whether its people are on holiday; a server and a studio's machine stay on.
    """
    hours = _HABITS[habit]
    if hours.on == (0, 24):
        return True
    weekend = _weekday(at) >= 5
    return not away and (hours.weekend or not weekend) and hours.on[0] <= _hour(at) < hours.on[1]


def _weekday(at: int) -> int:
    """0 for Monday; the first day of 1970 was a Thursday."""
    return (at // DAY + 3) % 7


def _hour(at: int) -> int:
    return at % DAY // 3_600


class Workload:
    """The work that one drive gets; belongs to that drive, with a stream of chance of its own."""

    def __init__(self, rng: Random, habit: Habit, *, load: float, surface: int) -> None:
        """Begin.

        Args:
            rng: chance.
            habit: hours and weeks.
            load: how much, 1 as usual.
            surface: capacity of the drive in bytes; backups read a part of it.
        """
        self._rng, self._hours, self._load, self._surface = rng, _HABITS[habit], load, surface
        self._activity = _ACTIVITIES[0]
        self._wander = 0.0
        self._habit_load = 1.0
        self._weights = self._new_weights()
        self._to_copy, self._copied_so_far, self._copy_to = 0, 0, False
        self.factor = 1.0
        """What a busy month multiplies the load by."""

    def _new_weights(self) -> list[float]:
        return [0.1 + self._rng.random() ** 2 for _ in _ACTIVITIES]

    def span(self, at: int, seconds: int, *, away: bool) -> Work:
        """The work of a span that ends at a time, the machine being on."""
        rng = self._rng
        self._drift(seconds)
        if self._to_copy:
            return self._copied(seconds)
        if self._load == 0:
            return NOTHING
        hours, weekend = self._hours, _weekday(at) >= 5
        curve = 1.0 if hours.busy[0] <= _hour(at) < hours.busy[1] else hours.rest
        if away:
            curve *= 0.05
        elif weekend:
            curve *= 0.5
        what = self._activity
        pace = what.pace * curve * self._load * self._habit_load * self.factor * exp(self._wander)
        count = int(pace * seconds * (0.9 + 0.2 * rng.random()))
        reads = int(count * min(1.0, what.reads * (0.9 + 0.2 * rng.random())))
        mix = Mix(
            size=self._size(what.read),
            sequential=what.sequential,
            cached=what.cached,
            stroke=what.stroke,
            place=0.2 + 0.3 * rng.random(),
        )
        writing = replace(mix, size=self._size(what.write))
        return Work(reads=reads, writes=count - reads, reading=mix, writing=writing)

    def _size(self, kibibytes: float) -> int:
        """Bytes a request over a span, near what is usual for an activity."""
        return max(BLOCK, int(kibibytes * 1024 * exp(self._rng.gauss(0.0, 0.2))) // BLOCK * BLOCK)

    def _drift(self, seconds: int) -> None:
        rng = self._rng
        if rng.random() > exp(-seconds / _STAYS):
            self._activity = rng.choices(_ACTIVITIES, self._weights)[0]
        keeps = exp(-seconds / _WANDERS)
        self._wander = keeps * self._wander + _WANDER * sqrt(1 - keeps**2) * rng.gauss(0.0, 1.0)
        if rng.random() < seconds / DAY / _CHANGES_DAYS:
            self._weights = self._new_weights()
            self._habit_load = exp(rng.gauss(0.0, 0.5))

    def plan_backup(self, *, whole: bool, target: bool) -> None:
        """Begin a backup: the source is read in large pieces, the target written, other work waits.

        Args:
            whole: whether everything is copied, as once a week, or only what is new.
            target: whether the drive is where the copies go.
        """
        share = (0.3 if whole else 0.01) * (0.8 + 0.4 * self._rng.random())
        self._to_copy = int(share * min(self._surface, _MOST_COPIED) / _COPY_SIZE)
        self._copied_so_far, self._copy_to = 0, target

    def _copied(self, seconds: int) -> Work:
        """The next piece of a backup: it goes over the drive from its beginning, each place once."""
        count = min(self._to_copy, max(1, int(_COPY_PACE * seconds / _COPY_SIZE)))
        begin, share = self._copied_so_far * _COPY_SIZE / self._surface, count * _COPY_SIZE / self._surface
        self._to_copy -= count
        self._copied_so_far += count
        mix = Mix(size=_COPY_SIZE, sequential=0.95, cached=0.02, stroke=share, place=begin + share / 2)
        if self._copy_to:
            return Work(writes=count, reading=_NONE, writing=mix, direct=True)
        return Work(reads=count, reading=mix, writing=_NONE, direct=True)


def limited(work: Work, share: float) -> Work:
    """The part of a work that a drive can do in its time."""
    if share >= 1:
        return work
    return replace(work, reads=int(work.reads * share), writes=int(work.writes * share))
