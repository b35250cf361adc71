"""Page's CUSUM that knows both rates: the floor under every delay (Page 1954; optimal: Moustakides 1986).

Days are always on and nothing is absorbed here, for the CUSUM and for the ledger that is held against it.
"""

from bisect import bisect_left
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from math import expm1, log, sqrt
from random import Random

from diskwatch.trends.norms import YEAR
from tests.trends.simulators.quick import Quick

Path = Iterator[tuple[int, float]]
"""Days with an error, each with the statistic at its end."""


def error_days(chance: Random, per_day: float) -> Iterator[int]:
    """Days with an error, for ever; a day has one with probability ``1 - exp(-per_day)``."""
    day = 0
    while True:
        # The waiting time in whole days: geometric, by inversion of the exponential law.
        day += 1 + int(chance.expovariate(per_day))
        yield day


def cusum(days: Iterator[int], *, norm: float, ratio: float) -> Path:
    """The CUSUM of "ratio times the norm" against the norm.

    Args:
        days: with an error.
        norm: errors a day.
        ratio: by which it knows that the rate is multiplied.
    """
    gain = log(expm1(-ratio * norm) / expm1(-norm))
    total, before = 0.0, 0
    for day in days:
        quiet = day - before - 1
        total = max(0.0, total - quiet * (ratio - 1) * norm) + gain
        before = day
        yield day, total


def ledger(days: Iterator[int], *, norm: float) -> Path:
    """The evidence of the product's ledger on the same days."""
    return Quick(norm, absorbed=0).episodes((day, day) for day in days)


class Climb:
    """When a statistic first reached each height on one path, looked at as far as it is asked."""

    def __init__(self, path: Path) -> None:
        """Begin before the first day."""
        self._path = path
        self._days: list[int] = []
        self._heights: list[float] = []

    def first(self, threshold: float) -> int:
        """The first day on which the statistic reached a threshold."""
        while not self._heights or self._heights[-1] < threshold:
            day, height = next(self._path)
            if not self._heights or height > self._heights[-1]:
                self._days.append(day)
                self._heights.append(height)
        return self._days[bisect_left(self._heights, threshold)]


def mean_time(climbs: Sequence[Climb], threshold: float) -> float:
    """Mean days to reach a threshold."""
    return sum(climb.first(threshold) for climb in climbs) / len(climbs)


def calibrated(climbs: Sequence[Climb], days: float, *, step: float) -> float:
    """The lowest threshold whose mean time is at least so many days.

    Some mean times cannot be met: one error alone reaches every threshold up to its own weight. Then the mean
    time of what is returned is longer.

    Args:
        climbs: of sound drives.
        days: the mean time wanted.
        step: by which the threshold is raised until the mean time is long enough; then it is halved.
    """
    high = step
    while mean_time(climbs, high) < days:
        high += step
    low = high - step
    for _ in range(40):
        middle = (low + high) / 2
        low, high = (low, middle) if mean_time(climbs, middle) >= days else (middle, high)
    return high


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """Mean delays at equal true false-alarm rate; days.

    Attributes:
        ratio: of the true rate to the norm.
        years: mean time to a false alarm of the ledger; the CUSUM's is the same or longer.
        cusum_years: the CUSUM's own.
        ledger: mean delay of the ledger.
        cusum: mean delay of the CUSUM.
        error: one standard error of the quotient of the two.
    """

    ratio: float
    years: float
    cusum_years: float
    ledger: float
    cusum: float
    error: float

    @property
    def quotient(self) -> float:
        """How many times as long the ledger takes."""
        return self.ledger / self.cusum


def compare(*, norm: float, ratio: float, years: float, runs: int, seed: int) -> Comparison:
    """Measure both on the same days, from a fresh start and with the change on the first day.

    Args:
        norm: errors a day.
        ratio: of the true rate to the norm after the change.
        years: true mean time between false alarms to calibrate both to.
        runs: drives.
        seed: of all randomness.
    """
    days = years * YEAR
    steps = {"ledger": days / 20, "cusum": 0.1}
    makes: dict[str, Callable[[Iterator[int]], Path]] = {
        "ledger": lambda on: ledger(on, norm=norm),
        "cusum": lambda on: cusum(on, norm=norm, ratio=ratio),
    }
    true_years, delays = {}, {}
    for name, make in makes.items():
        sound = [Climb(make(error_days(_chance(seed, run), norm))) for run in range(runs)]
        threshold = calibrated(sound, days, step=steps[name])
        true_years[name] = mean_time(sound, threshold) / YEAR
        changed = (Climb(make(error_days(_chance(seed + 1, run), norm * ratio))) for run in range(runs))
        delays[name] = [climb.first(threshold) for climb in changed]
    means = {name: sum(found) / runs for name, found in delays.items()}
    quotient = means["ledger"] / means["cusum"]
    apart = [one - quotient * other for one, other in zip(delays["ledger"], delays["cusum"], strict=True)]
    error = sqrt(sum(one**2 for one in apart) / (runs - 1) / runs) / means["cusum"]
    return Comparison(
        ratio=ratio,
        years=true_years["ledger"],
        cusum_years=true_years["cusum"],
        ledger=means["ledger"],
        cusum=means["cusum"],
        error=error,
    )


def _chance(seed: int, run: int) -> Random:
    return Random(f"{seed} {run}")  # noqa: S311  # errors, not secrets
