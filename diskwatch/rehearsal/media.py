"""The recorded surface: where it goes bad, what the drive notices, what its firmware does about it.

Defects have a place, come in clusters and spread to what lies beside them. A bad sector is latent until the
computer, the drive's own scan or a self-test reads it. Where one of many tries brings the data after all, they
are moved to a spare sector (reallocated); else the sector is pending, and when it is next written it either
takes the data or is replaced. Rates are common practice, no source; that defects cluster is Bairavasundaram et
al. 2007 (from memory).
"""

from collections.abc import Iterable
from dataclasses import dataclass, field
from random import Random

from diskwatch.rehearsal.chance import poisson, share_of
from diskwatch.rehearsal.layout import Layout

SCAN_DAYS = 20.0
"""Days in which a drive's own scan comes once over all of its surface."""

LARGEST = 4_000
"""Units that a cluster comes to at most: by then a track or more is gone, and the head with it."""

SECTORS = 8
"""Logical sectors in a unit: what the drive counts goes by these."""

_MOVED_IN_TIME = 0.5
"""Share of bad sectors whose data are read after all, by many tries, and moved."""

_RECOVERS = 0.3
"""Share of pending sectors that take new data after all."""

_RESTORED_DAYS = 12.0
"""Days until half of the sectors that somebody could not read have been written anew, from a copy."""

_EDGE = 100
"""Damage spreads from one of so many units that went bad last: they lie at its edge."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Touched:
    """What the computer moved over a part of the surface.

    Attributes:
        begin: where it begins, as a share of the surface.
        end: where it ends.
        amount: bytes moved between the two, as a share of the surface.
    """

    begin: float = 0.0
    end: float = 1.0
    amount: float = 0.0

    def has(self, place: float) -> bool:
        """Whether a place lies within."""
        return self.begin <= place <= self.end

    @property
    def chance(self) -> float:
        """The chance that a place within was met."""
        width = self.end - self.begin
        return 0.0 if self.amount <= 0 else min(1.0, self.amount / width) if width > 0 else 1.0


UNTOUCHED = Touched()


@dataclass(slots=True, kw_only=True)
class Cluster:
    """Bad units that lie together.

    Attributes:
        growth: share by which it grows a day, from debris and a head that touches.
        ever: every unit of it that went bad, in that order.
        latent: those that nobody has noticed yet.
    """

    growth: float
    ever: list[int]
    latent: list[int]


@dataclass(slots=True, kw_only=True)
class Surface:
    """A drive's surface and what its firmware counts.

    Attributes:
        layout: where its units lie.
        spares: sectors that can still be put in place of bad ones.
        defects_a_year: clusters that come by themselves; 0.016 gives the share of sound data-centre drives with
            a replaced sector after three years that open drive data of 2019 show (`tests` compare).
        reallocated: sectors replaced so far.
        uncorrectable: reads that were given up.
        clusters: where it is bad.
        waiting: units that could not be read and wait, and whether it was the computer that wanted them.
        scanned: those of them that the drive's own scan, or a test, could not read.
    """

    layout: Layout
    spares: int = 40_000
    defects_a_year: float = 0.016
    reallocated: int = 0
    uncorrectable: int = 0
    clusters: list[Cluster] = field(default_factory=list)
    waiting: dict[int, bool] = field(default_factory=dict)
    scanned: set[int] = field(default_factory=set)

    def scratch(self, rng: Random, units: int, growth: float, place: float | None = None) -> None:
        """Damage a place.

        Args:
            rng: chance.
            units: how many go bad at once.
            growth: share by which the damage grows a day.
            place: where, as a share of the surface, 0 for the outer edge; None for anywhere.
        """
        first = min(self.layout.units - 1, int((rng.random() if place is None else place) * self.layout.units))
        cluster = Cluster(growth=growth, ever=[first], latent=[first])
        self.clusters.append(cluster)
        _spread(rng, self.layout, cluster, units - 1)

    def give_up(self, unit: int) -> None:
        """The computer's read of a unit was given up: it waits from now on."""
        self.uncorrectable += 1
        self.waiting[unit] = True

    def live(self, rng: Random, days: float, *, read: Touched, written: Touched) -> None:
        """Let time pass.

        Args:
            rng: chance.
            days: how long the drive was powered and awake.
            read: what the computer read from the medium meanwhile.
            written: what it wrote.
        """
        for _ in range(poisson(rng, self.defects_a_year * days / 365.25)):
            self.scratch(rng, 1 + int(rng.expovariate(0.7)), 0.0)
        for cluster in self.clusters:
            size = len(cluster.ever)
            more = poisson(rng, size * cluster.growth * days * (1 - size / LARGEST))
            _spread(rng, self.layout, cluster, min(more, LARGEST - size))
            self._notice(rng, cluster, days, read)
        self.clusters = [one for one in self.clusters if one.latent or one.growth]
        if self.waiting:
            self._scan_again(rng, days)
            self._repair(rng, days, written)

    def _place(self, unit: int) -> float:
        return unit / self.layout.units

    def _notice(self, rng: Random, cluster: Cluster, days: float, read: Touched) -> None:
        if not cluster.latent:
            return
        within = [unit for unit in cluster.latent if read.has(self._place(unit))]
        wanted = set(_some(rng, within, read.chance))
        met = [unit for unit in cluster.latent if unit not in wanted]
        met = [*sorted(wanted), *_some(rng, met, days / SCAN_DAYS)]
        for unit in met:
            if self.spares >= SECTORS and rng.random() < _MOVED_IN_TIME:
                self._replace()
            elif unit in wanted:
                self.give_up(unit)
            else:
                self.waiting[unit] = False
                self.scanned.add(unit)
        gone = set(met)
        cluster.latent = [unit for unit in cluster.latent if unit not in gone]

    def _replace(self) -> None:
        self.spares -= SECTORS
        self.reallocated += SECTORS

    def _scan_again(self, rng: Random, days: float) -> None:
        unconfirmed = [unit for unit in self.waiting if unit not in self.scanned]
        self.scanned.update(_some(rng, unconfirmed, days / SCAN_DAYS))

    def _repair(self, rng: Random, days: float, written: Touched) -> None:
        """What is written anew: by chance, or since somebody missed it and has a copy."""
        by_chance = [unit for unit in self.waiting if written.has(self._place(unit))]
        done = set(_some(rng, by_chance, written.chance))
        if written.amount > 0:
            missed = [unit for unit, wanted in self.waiting.items() if wanted and unit not in done]
            done.update(_some(rng, missed, 1 - 0.5 ** (days / _RESTORED_DAYS)))
        for unit in sorted(done):
            if self.spares < SECTORS:
                break
            if rng.random() >= _RECOVERS:
                self._replace()
            del self.waiting[unit]
            self.scanned.discard(unit)

    def tested(self) -> int | None:
        """An extended test reads everything from the first block on, and stops at the first bad unit.

        Returns:
            That unit, which waits from now on; None where all could be read.
        """
        latent = [unit for cluster in self.clusters for unit in cluster.latent]
        first = min((*latent, *self.waiting), default=None)
        if first is None:
            return None
        for cluster in self.clusters:
            cluster.latent = [unit for unit in cluster.latent if unit != first]
        self.waiting.setdefault(first, False)
        self.scanned.add(first)
        return first

    @property
    def pending(self) -> int:
        """Sectors that could not be read and wait."""
        return SECTORS * len(self.waiting)

    @property
    def unreadable_by_itself(self) -> int:
        """Those of them that the drive's own scan, or a test, could not read."""
        return SECTORS * len(self.scanned)

    @property
    def latent(self) -> int:
        """Bad units that nobody has noticed yet."""
        return sum(len(one.latent) for one in self.clusters)

    @property
    def spare_share(self) -> float:
        """Share of the spare sectors that is left, 0 to 1."""
        whole = self.spares + self.reallocated
        return self.spares / whole if whole else 0.0


def _spread(rng: Random, layout: Layout, cluster: Cluster, units: int) -> None:
    """Damage what lies beside bad units: from one of them outwards, over those that are bad already."""
    known = set(cluster.ever) if units > 0 else set()
    for _ in range(units):
        unit = rng.choice(cluster.ever[-_EDGE:])
        while unit in known:
            unit = layout.beside(rng, unit)
        known.add(unit)
        cluster.ever.append(unit)
        cluster.latent.append(unit)


def _some(rng: Random, units: Iterable[int], chance: float) -> list[int]:
    """Those of a few units to which something happens, each with the same chance."""
    every = list(units)
    return rng.sample(every, share_of(rng, len(every), min(1.0, chance)))
