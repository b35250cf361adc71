"""Turning platters: how long the heads travel, how long the sector takes to come round, how fast it passes.

Rotation is exact: a turn takes 60/rpm seconds and the wait for a sector is uniform over one turn. Everything
else is a model: seek time grows with the square root of the distance (Ruemmler and Wilkes 1994, from memory,
for short seeks; taken for all distances here), bits lie equally dense on every track, so that the rate is as
the radius. Millimetres, rates and seek times are common practice, no source.
"""

from dataclasses import dataclass
from math import pi, sqrt
from random import Random

_MEAN_ROOT = 8 / 15
"""Mean of the square root of the distance between two places drawn at random from a unit length."""

_VARIANCE_ROOT = 1 / 3 - _MEAN_ROOT**2

_AGAIN = 0.5
"""Chance that one more turn is not enough, on a sound head (practice)."""

_CACHE_MS = 0.15
_CACHE_BYTES_A_MS = 500_000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Mix:
    """What the requests of a span are like.

    Attributes:
        size: bytes a request.
        sequential: share of them that goes on where the last one ended.
        cached: share that the drive's own memory answers.
        stroke: share of the surface that they are spread over.
        place: where on the surface, 0 the outer edge (first block) to 1 the inner one.
        retried: share of requests to the medium that need further turns.
        again: chance that each further turn is not enough either, below 1.
    """

    size: int
    sequential: float
    cached: float
    stroke: float
    place: float = 0.3
    retried: float = 0.0
    again: float = _AGAIN

    @property
    def reach(self) -> tuple[float, float]:
        """The part of the surface that the requests fall on: begin and end as shares of it."""
        return max(0.0, self.place - self.stroke / 2), min(1.0, self.place + self.stroke / 2)


@dataclass(frozen=True, slots=True, kw_only=True)
class Service:
    """How long one request keeps the drive busy.

    Attributes:
        mean_ms: mean time, milliseconds.
        variance: its variance, squared milliseconds.
    """

    mean_ms: float
    variance: float

    @property
    def spread(self) -> float:
        """Squared coefficient of variation: 0 where all take the same time, 1 for the exponential law."""
        return self.variance / self.mean_ms**2 if self.mean_ms > 0 else 0.0

    @property
    def square_ms(self) -> float:
        """Mean of the squared time, squared milliseconds."""
        return self.variance + self.mean_ms**2


@dataclass(frozen=True, slots=True, kw_only=True)
class Platters:
    """A drive's mechanics.

    Attributes:
        rpm: turns a minute.
        outer_mm: radius of the outermost track; half of a 95 mm platter.
        inner_mm: radius of the innermost track; half of the outer one gives the usual 2:1 of zoned recording.
        zones: bands of equal data a track.
        outer_rate: bytes a second at the outer edge.
        track_ms: seek to the next track.
        full_ms: seek over the whole surface.
        overhead_ms: what every request costs before anything moves.
    """

    rpm: int = 7200
    outer_mm: float = 47.5
    inner_mm: float = 23.75
    zones: int = 20
    outer_rate: float = 210e6
    track_ms: float = 1.0
    full_ms: float = 15.0
    overhead_ms: float = 0.2

    @property
    def turn_ms(self) -> float:
        """One turn, milliseconds."""
        return 60_000 / self.rpm

    @property
    def rim_speed(self) -> float:
        """Speed of the outermost track, metres a second."""
        return 2 * pi * self.outer_mm / 1000 * self.rpm / 60

    def radius_mm(self, place: float) -> float:
        """Radius at a place: with equal density the data up to a track are as the area outside of it."""
        outer, inner = self.outer_mm**2, self.inner_mm**2
        return sqrt(outer - place * (outer - inner))

    def rate(self, place: float) -> float:
        """Bytes a second that pass under the heads at a place, the same all over its zone."""
        zone = min(self.zones - 1, int(place * self.zones))
        return self.outer_rate * self.radius_mm(zone / self.zones) / self.outer_mm

    def seek_ms(self, distance: float) -> float:
        """Travel over a share of the surface; none where the heads are there already."""
        return 0.0 if distance <= 0 else self.track_ms + (self.full_ms - self.track_ms) * sqrt(distance)

    def wait_ms(self, rng: Random) -> float:
        """Wait for the sector to come round."""
        return rng.random() * self.turn_ms

    def retry_ms(self, rng: Random, again: float = _AGAIN) -> float:
        """What a retried read costs: whole turns, at least one.

        Args:
            rng: chance.
            again: chance that each turn is not enough.
        """
        turns = 1
        while rng.random() < again:
            turns += 1
        return turns * self.turn_ms

    def request_ms(self, rng: Random, mix: Mix) -> float:
        """One request's time."""
        if rng.random() < mix.cached:
            return _CACHE_MS + mix.size / _CACHE_BYTES_A_MS
        time = self.overhead_ms + mix.size / self.rate(mix.place) * 1000
        if rng.random() >= mix.sequential:
            time += self.seek_ms(mix.stroke * abs(rng.random() - rng.random())) + self.wait_ms(rng)
        if rng.random() < mix.retried:
            time += self.retry_ms(rng, mix.again)
        return time

    def service(self, mix: Mix) -> Service:
        """Mean and variance of `request_ms`, in closed form."""
        turn, travel = self.turn_ms, (self.full_ms - self.track_ms) * sqrt(mix.stroke)
        flat = self.overhead_ms + mix.size / self.rate(mix.place) * 1000
        # Turns until one is enough follow the geometric law: mean 1/q, mean square (2 - q)/q^2, q their chance.
        enough = 1 - mix.again
        again = mix.retried / enough * turn
        again_variance = mix.retried * (1 + mix.again) / enough**2 * turn**2 - again**2
        moved = self.track_ms + travel * _MEAN_ROOT + turn / 2
        moved_variance = travel**2 * _VARIANCE_ROOT + turn**2 / 12
        medium = 1 - mix.cached
        kinds = (
            (mix.cached, _CACHE_MS + mix.size / _CACHE_BYTES_A_MS, 0.0),
            (medium * mix.sequential, flat + again, again_variance),
            (medium * (1 - mix.sequential), flat + moved + again, moved_variance + again_variance),
        )
        mean = sum(share * time for share, time, _ in kinds)
        square = sum(share * (time**2 + variance) for share, time, variance in kinds)
        return Service(mean_ms=mean, variance=square - mean**2)
