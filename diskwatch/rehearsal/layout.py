"""Where a block lies on the platters: which head reaches it, and what lies beside it.

Block numbers run along the tracks of one head for a band, then along the same band of the next head, and
inwards band by band. Bytes a surface and the length of a band are common practice, no source; how many blocks
a track has follows from the drive's rate and speed.
"""

from dataclasses import dataclass
from random import Random

from diskwatch.rehearsal.rotating import Platters

UNIT = 4_096
"""Bytes that go bad together: a physical sector, which holds eight logical ones."""

_A_SURFACE = 1_000_000_000_000
_BAND_TRACKS = 200


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """How a disk's physical sectors (units) are laid out.

    Attributes:
        capacity: bytes of the whole drive.
        platters: its mechanics.
    """

    capacity: int
    platters: Platters

    @property
    def units(self) -> int:
        """How many there are."""
        return self.capacity // UNIT

    @property
    def heads(self) -> int:
        """One for each surface that holds data."""
        return -(-self.capacity // _A_SURFACE)

    def track(self, unit: int) -> int:
        """Units on the track on which a unit lies; more of them further out."""
        rate = self.platters.rate(unit / self.units)
        return max(1, int(rate * self.platters.turn_ms / 1000 / UNIT))

    @property
    def _band(self) -> int:
        return _BAND_TRACKS * self.track(0)

    def head(self, unit: int) -> int:
        """The head that reaches a unit."""
        return unit // self._band % self.heads

    def anywhere(self, rng: Random, head: int, begin: float, end: float) -> int:
        """A unit under a head.

        Args:
            rng: chance.
            head: which.
            begin: where the part of the drive begins that it is drawn from, as a share of it.
            end: where it ends. Where the head has no band in it, the nearest one is taken.
        """
        drawn = int((begin + (end - begin) * rng.random()) * self.units)
        first = drawn - drawn // self._band % self.heads * self._band
        return min(self.units - 1, max(0, first + head * self._band))

    def beside(self, rng: Random, unit: int) -> int:
        """A neighbour of a unit, along its track or on the next one; itself at the edge of the surface."""
        step = rng.choice((1, -1, self.track(unit), -self.track(unit)))
        beside = unit + step
        same = 0 <= beside < self.units and beside // self._band == unit // self._band
        return beside if same else unit
