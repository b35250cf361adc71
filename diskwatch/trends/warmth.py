"""How warm a drive was on its latest days: what latency and the ledger of temperature ask of each."""

from collections.abc import Sequence
from dataclasses import dataclass

KEPT = 8
"""Days that are remembered: traffic of a day is looked at once it is over, after a stop of the watch later."""

_COLDEST, _HOTTEST = -60, 150
"""Degrees Celsius outside of which a drive's own word cannot be right (common practice, no source)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Warmth:
    """One day; plain values.

    Attributes:
        day: UTC day number.
        readings: how many told a temperature.
        total: their sum, degrees Celsius.
        highest: the highest, degrees Celsius.
    """

    day: int
    readings: int
    total: int
    highest: int

    @property
    def mean(self) -> float:
        """The day's usual temperature, degrees Celsius."""
        return self.total / self.readings


def felt(days: Sequence[Warmth], *, day: int, celsius: int | None) -> tuple[tuple[Warmth, ...], Warmth | None]:
    """Take in one reading.

    Args:
        days: the latest days, oldest first.
        day: UTC day number of the reading.
        celsius: what it told; None where it told none. What no drive can have tells nothing.

    Returns:
        The latest days after it, and the one that this reading ended, if it did. Days that lie ahead, because
        the clock was set back, are forgotten.
    """
    if celsius is None or not _COLDEST <= celsius <= _HOTTEST:
        return tuple(days), None
    past = [one for one in days if one.day <= day] if days and days[-1].day > day else days
    if past and past[-1].day == day:
        known = past[-1]
        today = Warmth(
            day=day,
            readings=known.readings + 1,
            total=known.total + celsius,
            highest=max(known.highest, celsius),
        )
        return (*past[:-1], today), None
    today = Warmth(day=day, readings=1, total=celsius, highest=celsius)
    return (*past[1 - KEPT :], today), past[-1] if past else None


def usual_on(days: Sequence[Warmth], day: int) -> float | None:
    """The usual temperature of a day, degrees Celsius; None where it is not known."""
    return next((one.mean for one in days if one.day == day), None)
