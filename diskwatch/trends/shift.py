"""One day's work held against the references: how much slower it was at equal load.

A slower drive slows every class of work; a changed habit, only some. So the day's shift is a low quantile over
the classes: at least 70 % of the comparable work was slower by it, or more. On changed habits a median raised
four times as many false alarms. (Method and constants: our own study of latency from ordinary traffic.)
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from enum import StrEnum

from diskwatch.records import Direction
from diskwatch.trends.middle import median, weighted_quantile
from diskwatch.trends.references import LEAST_SPREAD, Reference

LEAST_OF_CLASS = 3
"""Roll-ups of a class on one day below which its median says too little."""

LEAST_OF_DAY = 10
"""Roll-ups of a day in one direction below which the day is not scored."""

LEAST_CLASSES = 2
LEAST_WEIGHT = 4.0
QUANTILE = 0.3
_MOST_COUNTED = 12
"""Roll-ups of a class beyond which more add no weight: they share the day's own noise."""


class Silence(StrEnum):
    """Why a day has no shift."""

    LITTLE_TRAFFIC = "little-traffic"
    LEARNING = "learning"
    FEW_CLASSES = "few-classes"
    LITTLE_WEIGHT = "little-weight"


@dataclass(frozen=True, slots=True, kw_only=True)
class DayShift:
    """How one day compares.

    Attributes:
        day: UTC day number.
        direction: reads or writes.
        rollups: roll-ups of that day that took part.
        classes: classes that could be compared.
        shift: natural logarithm of how many times as long comparable work took; None where nothing can be said.
        silence: why nothing can be said; None where something can.
        temperature: the drive's usual temperature on that day, degrees Celsius; None where not known.
    """

    day: int
    direction: Direction
    rollups: int
    classes: int
    shift: float | None
    silence: Silence | None = None
    temperature: float | None = None


def by_class(work: Sequence[tuple[int, int]]) -> Mapping[int, Sequence[int]]:
    """A day's roll-ups by load class, lowest class first.

    Args:
        work: pairs of a load class and a thousandfold logarithm of a mean time, in any order.
    """
    found: dict[int, list[int]] = {}
    for load_class, log in sorted(work):
        found.setdefault(load_class, []).append(log)
    return found


def day_medians(classes: Mapping[int, Sequence[int]]) -> Mapping[int, float]:
    """Median logarithm of the time by class, for classes with enough roll-ups.

    Args:
        classes: as `by_class` gives them.

    Returns:
        Natural logarithms of milliseconds, by load class.
    """
    return {
        load_class: median(logs) / 1000 for load_class, logs in classes.items() if len(logs) >= LEAST_OF_CLASS
    }


def day_shift(
    work: Sequence[tuple[int, int]],
    references: Mapping[int, Reference],
    *,
    day: int,
    direction: Direction,
    temperature: float | None,
) -> tuple[DayShift, Mapping[int, float]]:
    """Hold a day against the references.

    Args:
        work: pairs of a load class and a thousandfold logarithm of a mean time in milliseconds.
        references: by load class, as they stood before that day.
        day: UTC day number.
        direction: reads or writes.
        temperature: of that day, degrees Celsius, or None.

    Returns:
        The day's shift, and its medians by class, which the references may learn from.
    """
    classes = by_class(work)
    medians = day_medians(classes)
    shifts, weights = [], []
    for load_class, day_median in medians.items():
        known = references.get(load_class)
        if known is not None and known.level is not None and known.spread is not None:
            shifts.append(day_median - known.level)
            counted = min(len(classes[load_class]), _MOST_COUNTED)
            weights.append(counted * (LEAST_SPREAD / known.spread) ** 2)
    silence = _silence(len(work), len(medians), weights)
    return DayShift(
        day=day,
        direction=direction,
        rollups=len(work),
        classes=len(shifts),
        shift=weighted_quantile(shifts, weights, QUANTILE) if silence is None else None,
        silence=silence,
        temperature=temperature,
    ), medians


def _silence(rollups: int, classes: int, weights: Sequence[float]) -> Silence | None:
    if rollups < LEAST_OF_DAY:
        return Silence.LITTLE_TRAFFIC
    if len(weights) < LEAST_CLASSES:
        return Silence.LEARNING if classes >= LEAST_CLASSES else Silence.FEW_CLASSES
    if sum(weights) < LEAST_WEIGHT:
        return Silence.LITTLE_WEIGHT
    return None
