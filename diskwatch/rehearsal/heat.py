"""Heat: the room with its seasons, hours and hot spells; the drive above it by load, and by what the fan moves.

Degrees are common practice, no source; the sums are those of a body that warms towards a level with one time
constant.
"""

from dataclasses import dataclass
from math import cos, exp, log, pi

from diskwatch.units import DAY

_YEAR = 365.25 * DAY
_HOTTEST_DAY = 200 * DAY
_HOTTEST_HOUR = 16 * 3_600


@dataclass(frozen=True, slots=True, kw_only=True)
class Spell:
    """Days on which it is hotter (or colder) than the season has it.

    Attributes:
        since: when it begins, UTC seconds since 1970.
        until: when it ends.
        celsius: by how much.
    """

    since: int
    until: int
    celsius: float


@dataclass(slots=True, kw_only=True)
class Room:
    """Where a machine stands.

    Attributes:
        celsius: mean over the year.
        season: how far summer and winter lie from it.
        daily: how far afternoon and night lie from the day's mean.
        spells: hot spells.
    """

    celsius: float
    season: float
    daily: float
    spells: list[Spell]

    def at(self, at: int) -> float:
        """Temperature of the air, °C."""
        year = cos(2 * pi * (at - _HOTTEST_DAY) / _YEAR)
        day = cos(2 * pi * (at % DAY - _HOTTEST_HOUR) / DAY)
        more = sum(one.celsius for one in self.spells if one.since <= at < one.until)
        return self.celsius + self.season * year + self.daily * day + more


@dataclass(slots=True, kw_only=True)
class Warmth:
    """A drive's own temperature.

    Attributes:
        celsius: now.
        idle: degrees above the room at rest, with the fan as built.
        load: degrees more at full load.
        constant: seconds in which two thirds of a change are through.
        before: what it was at the beginning of the last span.
        level: where it was heading over that span.
        seconds: how long that span was.
    """

    celsius: float
    idle: float
    load: float
    constant: float = 1_800.0
    before: float = 0.0
    level: float = 0.0
    seconds: float = 0.0

    def live(self, room: float, *, seconds: float, used: float, draught: float) -> None:
        """Let time pass.

        Args:
            room: temperature of the air, °C.
            seconds: how long.
            used: share of the time in which the drive was busy.
            draught: what the fan moves, 1 as built; half the air doubles the drive's rise above it.
        """
        self._towards(room + (self.idle + self.load * used) / max(0.05, draught), seconds)

    def rest(self, room: float, *, seconds: float) -> None:
        """Cool down, switched off."""
        self._towards(room, seconds)

    def _towards(self, level: float, seconds: float) -> None:
        self.before, self.level, self.seconds = self.celsius, level, seconds
        self.celsius = level + (self.celsius - level) * exp(-seconds / self.constant)

    def above(self, limit: float) -> float:
        """For how many seconds of the last span it was at or above a limit; exact, since it warms in one curve.

        Args:
            limit: °C.
        """
        begins, ends = self.before >= limit, self.celsius >= limit
        if begins is ends:
            return self.seconds if begins else 0.0
        if self.level == limit:  # reached at the very end, as far as a float can tell
            return 0.0
        crossed = self.constant * log((self.before - self.level) / (limit - self.level))
        return min(self.seconds, crossed if begins else self.seconds - crossed)
