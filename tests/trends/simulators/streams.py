"""False alarms of all streams of counters of invented drives together."""

from collections.abc import Mapping
from dataclasses import dataclass
from random import Random

from diskwatch.trends.norms import NORMS, YEAR
from tests.trends.simulators.counters import World, rises
from tests.trends.simulators.quick import Quick, alarms


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """Alarms in ten years of a drive, each alarm beginning the evidence anew.

    Attributes:
        rate: mean over drives.
        error: its standard error, from the spread between drives.
        streams: the same mean by stream.
    """

    rate: float
    error: float
    streams: Mapping[str, float]

    @property
    def upper(self) -> float:
        """Upper end of the one-sided 95 % interval (normal approximation)."""
        return self.rate + 1.645 * self.error


def measure(world: World, *, drives: int, years: int, seed: int) -> Measured:
    """Let drives live in a world, every stream independent of the others.

    Means add whether streams depend on each other or not, so the rate is the same under any dependence.
    """
    days = int(years * YEAR)
    by_stream = dict.fromkeys([norm.stream for norm in NORMS], 0)
    totals = []
    for drive in range(drives):
        total = 0
        for norm in NORMS:
            chance = Random(f"{seed} {drive} {norm.stream}")  # noqa: S311  # errors, not secrets
            stretches = rises(chance, per_day=norm.per_day, days=days, world=world)
            count = len(alarms(Quick(norm.per_day), stretches, norm.threshold))
            by_stream[norm.stream] += count
            total += count
        totals.append(total)
    mean = sum(totals) / drives
    variance = sum((one - mean) ** 2 for one in totals) / max(1, drives - 1)
    scale = 10 / years
    return Measured(
        rate=scale * mean,
        error=scale * (variance / drives) ** 0.5,
        streams={name: scale * count / drives for name, count in by_stream.items()},
    )
