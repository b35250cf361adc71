"""The way between drive and computer: errors that belong to the place, not to the drive in it."""

from dataclasses import dataclass
from random import Random

from diskwatch.rehearsal.chance import poisson


@dataclass(slots=True, kw_only=True)
class Bay:
    """A place for a drive: port, cable, connector.

    Attributes:
        name: the port's path as the kernel has it.
        strip: the power strip that feeds it.
        errors_a_year: damaged transfers by themselves, on a cable that sits well; 0.004 gives the share of
            drives with any that open drive data of 2019 show (`tests` compare).
        bad_days: share of days on which the contact is poor; 0 on a cable that sits well.
        burst: damaged transfers on such a day.
        hangs: share of them after which the drive does not answer one command in time.
    """

    name: str
    strip: str = "wall"
    errors_a_year: float = 0.004
    bad_days: float = 0.0
    burst: float = 0.0
    hangs: float = 0.0

    def loosen(self, *, bad_days: float, burst: float, hangs: float) -> None:
        """The connector works loose."""
        self.bad_days, self.burst, self.hangs = bad_days, burst, hangs

    def mend(self) -> None:
        """A new cable: no error more; what was counted stays on the drive."""
        self.loosen(bad_days=0.0, burst=0.0, hangs=0.0)

    def errors(self, rng: Random, days: float, *, moving: bool) -> tuple[int, int]:
        """Damaged transfers and commands that hung over a span.

        Args:
            rng: chance.
            days: how long.
            moving: whether any data moved; a silent cable damages nothing.
        """
        if not moving:
            return 0, 0
        damaged = poisson(rng, self.errors_a_year * days / 365.25)
        if self.bad_days > 0:
            damaged += poisson(rng, self.burst) if rng.random() < self.bad_days * days else 0
        return damaged, poisson(rng, damaged * self.hangs)
