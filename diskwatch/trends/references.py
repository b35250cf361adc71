"""What a class of work usually takes on a drive: learnt once from its own first days, then frozen.

A reference that went on learning would learn a slow decline and hide it. A class never seen before has no
reference and takes no part until it has one, so a new kind of work brings silence, not alarm. What a drive did
too slowly from its first day on cannot be seen this way: only a sibling of the same model could show it.
(Method and constants: our own study of latency from ordinary traffic.)
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

from diskwatch.trends.middle import median, scaled_mad

CLASS_DAYS = 12
"""Days with a usable median that a class is learnt from."""

LEAST_SPREAD = 0.08
"""No class counts as steadier than this, in natural logarithms: twelve days may agree by chance."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """What one class of work usually takes; plain values, complete for a restart.

    Attributes:
        medians: natural logarithms of a day's median time in milliseconds, of the first days, oldest first.
        level: their median; None until all of them are there.
        spread: their median absolute deviation, scaled to a standard deviation; None likewise.
    """

    medians: tuple[float, ...] = ()
    level: float | None = None
    spread: float | None = None


def learnt(reference: Reference, day_median: float) -> Reference:
    """The reference after one more day; a complete one stays as it is.

    Args:
        reference: state before.
        day_median: natural logarithm of the class's median time on that day, milliseconds.
    """
    if reference.level is not None:
        return reference
    medians = (*reference.medians, day_median)
    if len(medians) < CLASS_DAYS:
        return replace(reference, medians=medians)
    spread = max(LEAST_SPREAD, scaled_mad(medians))
    return Reference(medians=medians, level=median(medians), spread=spread)


def all_learnt(
    references: Mapping[int, Reference], day_medians: Mapping[int, float]
) -> Mapping[int, Reference]:
    """The references of all classes after one more day.

    Args:
        references: by load class, state before.
        day_medians: by load class, as for `learnt`.
    """
    new = {
        load_class: after
        for load_class, day_median in day_medians.items()
        if (after := learnt(before := references.get(load_class, Reference()), day_median)) is not before
    }
    return {**references, **new} if new else references
