"""The ledger of a counter that is read every day, in closed form over quiet stretches.

With ``q = exp(-(r - 1) norm)``, n quiet days turn R into ``R q^n + q (1 - q^n) / (1 - q)``. No alarm can fall
into a quiet stretch: there M changes by at most ``1 - (1 - q) M`` a day, which is below 0 for any M beyond
``1 / (1 - q)``, and every threshold lies beyond that. So only days with an episode need to be looked at, and a
thousand drives live twenty years in seconds. A test holds this against the product's own steps.
"""

from collections.abc import Iterable, Iterator
from math import exp, expm1

from diskwatch.trends.episodes import ABSORBED
from diskwatch.trends.ledger import CAP, RATIOS


class Quick:
    """One stream of one drive; day 1 is its first."""

    def __init__(self, per_day: float, *, absorbed: int = int(ABSORBED)) -> None:
        """Begin.

        Args:
            per_day: the norm, episodes a powered day.
            absorbed: days after an opening day that take no part.
        """
        self._decay = [-(ratio - 1) * per_day for ratio in RATIOS]
        self._limit = [exp(decay) / -expm1(decay) for decay in self._decay]
        self._episode = [expm1(-ratio * per_day) / expm1(-per_day) for ratio in RATIOS]
        self._absorbed = absorbed
        self._sums = [0.0] * len(RATIOS)
        self._next = 1
        self.slowest = 1 / -expm1(self._decay[0])
        """Evidence beyond which a quiet day always lowers it."""

    def until(self, day: int) -> float:
        """Evidence at the end of a day that is reached without another episode."""
        quiet = day + 1 - self._next
        if quiet > 0:
            self._next = day + 1
            self._sums = [
                limit + (total - limit) * exp(decay * quiet)
                for total, limit, decay in zip(self._sums, self._limit, self._decay, strict=True)
            ]
        return sum(self._sums) / len(RATIOS)

    def episodes(self, stretches: Iterable[tuple[int, int]]) -> Iterator[tuple[int, float]]:
        """Days that open an episode, each with the evidence at its end.

        Args:
            stretches: of days with rises, as first and last day, ordered by their first.
        """
        latest = 0
        for first, last in stretches:
            begin = max(first, latest + 1)
            latest = max(latest, last)
            while (day := max(begin, self._next)) <= last:
                self.until(day - 1)
                self._sums = [
                    min(CAP, (total + 1) * factor)
                    for total, factor in zip(self._sums, self._episode, strict=True)
                ]
                self._next = day + 1 + self._absorbed
                begin = self._next
                yield day, sum(self._sums) / len(RATIOS)

    def forget(self) -> None:
        """Begin the evidence anew, as after an alarm that somebody took note of."""
        self._sums = [0.0] * len(RATIOS)


def alarms(quick: Quick, stretches: Iterable[tuple[int, int]], threshold: float) -> list[int]:
    """Days of alarm of one stream; each alarm begins the evidence anew.

    Raises:
        ValueError: the threshold is too low for the closed form.
    """
    if threshold <= quick.slowest:
        raise ValueError(f"alarms at {threshold} days of evidence could fall into quiet stretches")
    found = []
    for day, evidence in quick.episodes(stretches):
        if evidence >= threshold:
            found.append(day)
            quick.forget()
    return found
