"""Mains: losses that hit every drive on the same strip at once."""

from dataclasses import dataclass
from random import Random

from diskwatch.rehearsal.chance import poisson


@dataclass(slots=True, kw_only=True)
class Strip:
    """A power strip.

    Attributes:
        name: what it is called.
        losses_a_year: times that power goes away without notice.
    """

    name: str
    losses_a_year: float = 1.0

    def losses(self, rng: Random, days: float) -> int:
        """How often power went away over a span; the same for every drive on it."""
        return poisson(rng, self.losses_a_year * days / 365.25)
