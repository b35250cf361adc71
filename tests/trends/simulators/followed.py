"""Invented disks followed by the product, and what their days of evidence come to at any threshold."""

import statistics
from collections.abc import Sequence
from dataclasses import dataclass
from random import Random

from diskwatch.records import Direction
from diskwatch.trends import latency, ledger
from diskwatch.trends.slowness import LEARNING, SUSPICIONS, TOLERANCE, factors
from tests.trends.simulators.disk import World, days


@dataclass(frozen=True, slots=True, kw_only=True)
class Scored:
    """One direction of a followed disk.

    Attributes:
        shifts: day and shift of every scored day.
        sigma: usual spread of a shift, or None where there were too few scored days.
        evidence: what the product's own ledger came to.
    """

    shifts: tuple[tuple[int, float], ...]
    sigma: float | None
    evidence: float | None


def follow(world: World, *, seed: str, count: int) -> tuple[dict[Direction, Scored], int]:
    """Follow one disk through its days.

    Returns:
        Each direction, and how many roll-ups there were.
    """
    state, rollups = latency.begin(), 0
    shifts: dict[Direction, list[tuple[int, float]]] = {one: [] for one in Direction}
    for day in days(Random(seed), count, world):  # noqa: S311  # work, not secrets
        for one in day:
            state = latency.arrive(state, one)
        rollups += len(day)
        state, held = latency.close_day(state)
        for shift in held:
            if shift.shift is not None:
                shifts[shift.direction].append((shift.day, shift.shift))
    return {
        one: Scored(shifts=tuple(shifts[one]), sigma=state.of(one).sigma, evidence=state.of(one).evidence)
        for one in Direction
    }, rollups


def alarms(scored: Scored, threshold: float, *, noted: bool) -> list[int]:
    """Days of alarm at a threshold.

    Args:
        scored: the days.
        threshold: evidence in days.
        noted: True where the owner takes note of each alarm, so that only a further slowing speaks again; False
            where an alarm changes nothing but that the evidence begins anew, which is what the bound counts.
    """
    if scored.sigma is None:
        return []
    found, state, tolerance = [], ledger.empty(len(SUSPICIONS)), TOLERANCE
    for place, (day, shift) in enumerate(scored.shifts):
        if place < LEARNING:
            continue
        state = ledger.after(state, factors((shift - tolerance) / scored.sigma))
        if state.evidence >= threshold:
            found.append(day)
            state = ledger.empty(len(SUSPICIONS))
            if noted:
                latest = [one for _, one in scored.shifts[place - 6 : place + 1]]
                tolerance = max(tolerance, statistics.median(latest))
    return found


def per_ten_years(counts: Sequence[int], years: float) -> tuple[float, float]:
    """Mean number in ten years of watching, with its standard error from the spread between drives.

    Args:
        counts: one a drive.
        years: that each was watched.
    """
    mean = sum(counts) / len(counts)
    variance = sum((one - mean) ** 2 for one in counts) / max(1, len(counts) - 1)
    return 10 * mean / years, 10 * (variance / len(counts)) ** 0.5 / years
