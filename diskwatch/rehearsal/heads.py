"""A head that reads badly: whole turns more for the sectors under it, and in the end sectors that it gives up.

A try under a weak head fails with a chance that grows; the next turn brings another try. Nothing else of the
drive changes: writes, and what other heads read, take their usual time but for the wait behind such reads. The
chances are common practice, no source.
"""

from dataclasses import dataclass, replace
from math import exp
from random import Random

from diskwatch.rehearsal.chance import poisson
from diskwatch.rehearsal.rotating import Mix

SOUND_RETRIES = 0.0003
"""Share of reads that need a second turn on a sound drive (practice)."""

TRIES = 20
"""Turns after which the drive gives a sector up."""

_BEGINS = 0.05
_WORST = 0.6
"""Chance that a try fails when a head begins to weaken, and when it is as weak as one that still flies."""


@dataclass(slots=True, kw_only=True)
class Head:
    """The head of a drive that may grow weak.

    Attributes:
        number: which head.
        of: how many heads the drive has; each serves an equal share of what is read.
        growth: share by which its failing tries grow a day at first; 0 for a sound head.
        weakness: chance that a try under it fails; 0 for a sound head.
    """

    number: int
    of: int
    growth: float = 0.0
    weakness: float = 0.0

    def __post_init__(self) -> None:
        """A head with a growth has begun to weaken."""
        if self.growth > 0:
            self.weakness = _BEGINS

    def live(self, days: float) -> None:
        """Grow weaker, ever more slowly towards the worst (the logistic curve)."""
        if self.growth > 0:
            left = (_WORST / self.weakness - 1) * exp(-self.growth * days)
            self.weakness = max(self.weakness, _WORST / (1 + left))

    def reading(self, mix: Mix) -> Mix:
        """Reads as they go with this head among the others."""
        if self.weakness <= 0:
            return replace(mix, retried=SOUND_RETRIES)
        weak = self.weakness / self.of
        return replace(mix, retried=SOUND_RETRIES + weak, again=self.weakness)

    def given_up(self, rng: Random, reads: float) -> int:
        """How many sectors under it are given up.

        Args:
            rng: chance.
            reads: reads of the medium, under whatever head.
        """
        return poisson(rng, reads / self.of * self.weakness ** (1 + TRIES))
