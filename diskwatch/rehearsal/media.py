"""The recorded surface: where it goes bad, what the drive notices, what its firmware does about it.

Defects come in clusters and grow from their edge. A bad sector is latent until it is read, then pending; when
it is next written it either takes the data after all or is replaced by a spare one (reallocated). Rates are
common practice, no source; that defects cluster is Bairavasundaram et al. 2007 (from memory).
"""

from dataclasses import dataclass
from random import Random

from diskwatch.rehearsal.chance import poisson, share_of

SCAN_DAYS = 20.0
"""Days in which a drive's own scan comes once over all of its surface."""

LARGEST = 4_000.0
"""Units that a cluster comes to at most: by then a track or more is gone, and the head with it."""

_RECOVERS = 0.3
"""Share of pending sectors that take new data after all."""

_REWRITTEN_DAYS = 12.0
"""Days until half of what is pending has been written anew, on a drive in ordinary use."""


@dataclass(slots=True, kw_only=True)
class Cluster:
    """Bad sectors that lie together.

    Attributes:
        latent: bad sectors that nobody has noticed yet.
        growth: share by which it grows a day.
        size: bad sectors that it ever had.
    """

    latent: int
    growth: float
    size: float


@dataclass(slots=True, kw_only=True)
class Surface:
    """A drive's surface and what its firmware counts.

    Attributes:
        spares: sectors that can still be put in place of bad ones.
        unit: sectors that go bad together: 8 where a physical sector holds eight logical ones.
        defects_a_year: clusters that come by themselves; 0.016 gives the share of sound data-centre drives with
            a replaced sector after three years that open drive data of 2019 show (`tests` compare).
        reallocated: sectors replaced so far.
        pending: sectors that could not be read and wait.
        uncorrectable: reads that were given up.
        scanned: bad sectors that the drive's own scan met and that are still pending.
        clusters: where it is bad.
    """

    spares: int = 40_000
    unit: int = 8
    defects_a_year: float = 0.016
    reallocated: int = 0
    pending: int = 0
    uncorrectable: int = 0
    scanned: int = 0
    clusters: list[Cluster]

    def scratch(self, sectors: int, growth: float) -> None:
        """Damage a place.

        Args:
            sectors: how many go bad at once, in units.
            growth: share by which the damage grows a day, from debris and a head that touches.
        """
        self.clusters.append(Cluster(latent=sectors, growth=growth, size=float(sectors)))

    def live(self, rng: Random, days: float, *, read_share: float, written: bool) -> None:
        """Let time pass.

        Args:
            rng: chance.
            days: how long the drive was powered.
            read_share: how much of the whole surface was read by the computer meanwhile, 1 for all of it.
            written: whether anything was written meanwhile.
        """
        for _ in range(poisson(rng, self.defects_a_year * days / 365.25)):
            self.scratch(1 + int(rng.expovariate(0.7)), 0.0)
        if self.clusters:
            self._notice(rng, days, read_share)
        if self.pending and written:
            self._repair(rng, days)

    def _notice(self, rng: Random, days: float, read_share: float) -> None:
        for cluster in self.clusters:
            more = poisson(rng, cluster.size * cluster.growth * days * max(0.0, 1 - cluster.size / LARGEST))
            cluster.latent += more
            cluster.size += more
            read = share_of(rng, cluster.latent, min(1.0, read_share))
            met = share_of(rng, cluster.latent - read, min(1.0, days / SCAN_DAYS))
            cluster.latent -= read + met
            self.pending += (read + met) * self.unit
            self.scanned += (read + met) * self.unit
            self.uncorrectable += read
        self.clusters = [one for one in self.clusters if one.latent or one.growth]

    def _repair(self, rng: Random, days: float) -> None:
        waiting = self.pending // self.unit
        done = share_of(rng, waiting, 1 - 0.5 ** (days / _REWRITTEN_DAYS))
        replaced = min(done - share_of(rng, done, _RECOVERS), self.spares // self.unit)
        recovered = done - replaced if self.spares >= self.unit else 0
        self.reallocated += replaced * self.unit
        self.spares -= replaced * self.unit
        self.pending -= (replaced + recovered) * self.unit
        self.scanned = min(self.scanned, self.pending)

    @property
    def latent(self) -> int:
        """Bad units that nobody has noticed yet."""
        return sum(one.latent for one in self.clusters)

    @property
    def spare_share(self) -> float:
        """Share of the spare sectors that is left, 0 to 1."""
        whole = self.spares + self.reallocated
        return self.spares / whole if whole else 0.0
