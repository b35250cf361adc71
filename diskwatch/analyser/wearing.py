"""What a solid-state drive uses up, carried from reading to reading: its endurance and its spare blocks."""

from dataclasses import dataclass, replace

from diskwatch.records import Reading
from diskwatch.trends import wear as wears
from diskwatch.trends.wear import Wear
from diskwatch.units import day_number


@dataclass(frozen=True, slots=True, kw_only=True)
class Wearing:
    """What is used up; plain values, complete for a restart.

    Attributes:
        day: UTC day number of the latest reading; None before the first.
        endurance: how much of the rated endurance is used up; None for drives that do not tell.
        spare: how much of the spare blocks is used up, 100 minus what is left; None likewise.
        spare_threshold: percentage of spare blocks that the drive itself calls too few, or None.
    """

    day: int | None = None
    endurance: Wear | None = None
    spare: Wear | None = None
    spare_threshold: int | None = None


def carried(before: Wearing, reading: Reading, *, at: int, hours: int | None) -> Wearing:
    """Take in one reading.

    Args:
        before: what was known.
        reading: what the drive told.
        at: when, UTC seconds since 1970.
        hours: powered hours since the reading before; None where they are not known, and then each day on
            which it was read counts as powered.
    """
    used, left = reading.number("percentage-used"), reading.number("available-spare")
    if used is None and left is None:
        return before
    # A clock that was set back must not let days come twice.
    today = day_number(at)
    day = today if before.day is None else max(today, before.day)
    new_day = before.day is not None and day > before.day
    powered = float(new_day) if hours is None else max(hours, 0) / 24
    written = reading.number("data-written")
    threshold = reading.number("spare-threshold")
    return replace(
        before,
        day=day,
        endurance=_carried(before.endurance, used, day, written, powered),
        spare=_carried(before.spare, None if left is None else max(0, 100 - left), day, written, powered),
        spare_threshold=before.spare_threshold if threshold is None else threshold,
    )


def _carried(
    before: Wear | None, percent: int | None, day: int, written: int | None, powered: float
) -> Wear | None:
    if percent is None:
        return before
    volume = None if written is None else float(written)
    if before is None:
        return wears.begin(day=float(day), percent=percent, written=volume)
    return wears.seen(before, day=float(day), percent=percent, written=volume, powered=powered)
