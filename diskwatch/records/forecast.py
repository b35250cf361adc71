"""When a signal is to be expected at a limit: what was forecast, and what became of it.

Every forecast is kept with the limit that it spoke of, so that it can be held against what came, on the owner's
own drives.
"""

from dataclasses import dataclass
from enum import StrEnum
from math import ceil, floor


class LimitSource(StrEnum):
    """Who set a limit.

    DRIVE was read from the drive itself, STANDARD is what the standard or the maker's rating means by the
    value, OWN is relative to the drive's own past, and USUAL is the usual range of makers: a fallback that is
    said to be one wherever it is shown.
    """

    DRIVE = "drive"
    STANDARD = "standard"
    OWN = "own"
    USUAL = "usual"


@dataclass(frozen=True, slots=True, kw_only=True)
class Forecast:
    """Between when and when a signal will reach a limit, as things go now.

    Attributes:
        signal: the signal.
        limit: the value in question, in the signal's unit.
        made_on_day: UTC day number that it was made on.
        low: the lower end in days from then; None where nothing can be said; 0 where the limit is reached.
        high: the upper end in days from then; None where nothing can be said, or where the interval has no
            upper end (it may well never happen as things go now).
        probability: how likely the interval is to hold the outcome, by the model of the forecast.
        reason: why nothing can be said, as a part of a sentence; None where something can.
        limit_from: who set the limit.
    """

    signal: str
    limit: float
    made_on_day: int
    low: float | None
    high: float | None
    probability: float
    reason: str | None
    limit_from: LimitSource = LimitSource.STANDARD

    @property
    def known(self) -> bool:
        """Whether there is an interval at all."""
        return self.low is not None

    def held(self, *, reached: int | None, seen_until: int) -> bool | None:
        """Whether what came lies within the interval, to the whole days in which drives are watched.

        Args:
            reached: UTC day number on which the limit was reached; None where it was not.
            seen_until: UTC day number up to which the drive was watched.

        Returns:
            None as long as that is open, and for a forecast that said nothing.
        """
        if self.low is None:
            return None
        if reached is not None:
            waited = reached - self.made_on_day
            return floor(self.low) <= waited and (self.high is None or waited <= ceil(self.high))
        waited = seen_until - self.made_on_day
        if self.high is None:
            return True if waited >= self.low else None
        return False if waited > ceil(self.high) else None
