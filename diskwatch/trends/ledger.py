"""The evidence ledger: a running figure whose false alarms stay bounded however long one watches.

A mixture of Shiryaev-Roberts statistics, in the recent literature a special case of e-detectors (Shin, Ramdas
and Rinaldo). For each suspicion k, a step of exposure e with factor L_k turns R_k into ``(R_k + e) L_k``; the
evidence M is the mean of the R_k. While the drive keeps within its norm every L_k has a conditional mean of at
most 1, so M minus the days watched has no upward drift, and with a threshold of c days

    expected false alarms in T powered days  <=  T / c            (proved from that mean alone)

with no assumption on independence. M is therefore read in days: a drive within its norm reaches this evidence
at most once in M days of watching, on average. It is no probability of anything.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import exp, expm1

RATIOS = (3.0, 6.0, 12.0, 25.0, 50.0, 100.0)
"""The suspicions about a counter: episodes come this many times as often as the norm allows."""

CAP = 1e15
"""No R_k grows beyond this; a cap only lowers M, so the bound holds."""


@dataclass(frozen=True, slots=True)
class Ledger:
    """The state: one running figure a suspicion, all equally weighted.

    Attributes:
        sums: R_k in days, one a suspicion.
    """

    sums: tuple[float, ...]

    @property
    def evidence(self) -> float:
        """M in days of watching."""
        return sum(self.sums) / len(self.sums)


def empty(suspicions: int = len(RATIOS)) -> Ledger:
    """A ledger before its first step."""
    return Ledger((0.0,) * suspicions)


def after(ledger: Ledger, factors: Sequence[float], exposure: float = 1.0) -> Ledger:
    """The ledger after one step.

    Args:
        ledger: state before.
        factors: L_k of this step, one a suspicion, each at least 0.
        exposure: powered days that the step covers, above 0.

    Raises:
        ValueError: the number of factors is not that of the suspicions, or the exposure is not above 0.
    """
    if exposure <= 0:
        raise ValueError(f"a step needs an exposure above 0 days, not {exposure}")
    sums = [(total + exposure) * factor for total, factor in zip(ledger.sums, factors, strict=True)]
    return Ledger(tuple(sums if max(sums) < CAP else [min(CAP, one) for one in sums]))


@lru_cache(maxsize=1024)  # nearly every step is a quiet day of one of a few norms
def count_factors(*, episode: bool, exposure: float, norm_per_day: float) -> tuple[float, ...]:
    """The factors L_k of a counter's step: likelihood ratios of "r times the norm" against the norm.

    With episodes at rate l a day, a step of e days holds none with probability ``exp(-l e)``. Assumption:
    outside absorbed days the chance of an episode on a step, given the past, is at most ``1 - exp(-l e)``
    (*the episode assumption*). Both factors grow with that chance, so a rate below the norm is covered too.

    Args:
        episode: whether one began within the step.
        exposure: powered days, above 0.
        norm_per_day: tolerated episodes a powered day, above 0.

    Returns:
        One factor a ratio of `RATIOS`.
    """
    tolerated = norm_per_day * exposure
    if episode:
        return tuple(expm1(-ratio * tolerated) / expm1(-tolerated) for ratio in RATIOS)
    return tuple(exp(-(ratio - 1) * tolerated) for ratio in RATIOS)
