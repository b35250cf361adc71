"""Time left until the first of a drive's limits is reached."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Margin:
    """Between when and when the first limit will be reached, as things go now, or why that is not known.

    Attributes:
        low: the lower end in days from now; None where it is not known; 0 where a limit is reached.
        high: the upper end in days from now; None where it is not known or has no end.
        probability: how likely the interval is to hold the outcome, by the model of its forecast; None where
            nothing is known.
        signal: the signal whose limit it is; None where nothing is known.
        limit: that limit, in the signal's unit, or None likewise.
        reason: why nothing is known, a part of a sentence; None where something is.
    """

    low: float | None = None
    high: float | None = None
    probability: float | None = None
    signal: str | None = None
    limit: float | None = None
    reason: str | None = None

    @property
    def known(self) -> bool:
        """Whether there is an interval."""
        return self.low is not None
