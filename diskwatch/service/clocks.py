"""The clocks of a machine, and whether one was set or the machine slept. Pure: the clocks are handed in.

Three are needed (clock_gettime(2)): the wall clock, which people and NTP set; the time since the start of the
system, which nobody sets and which runs on in sleep; and the same without sleep, by which threads wait.
"""

from collections.abc import Callable
from dataclasses import dataclass

from diskwatch.units import say_span

JUMP = 5.0
"""Seconds by which the clocks may drift apart between two looks; NTP corrects less, and does it gradually."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Clocks:
    """All three, each in seconds.

    Attributes:
        wall: UTC since 1970.
        steady: since the start of the system, sleep included.
        awake: the same without sleep.
    """

    wall: float
    steady: float
    awake: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Moved:
    """What happened between two looks.

    Attributes:
        set_by: seconds by which the wall clock was set forward, or back where negative.
        slept: seconds for which the machine slept.
    """

    set_by: float
    slept: float

    def sentence(self) -> str:
        """What happened, for the day book."""
        parts = []
        if self.slept:
            parts.append(f"The machine slept for {say_span(self.slept)}")
        if self.set_by:
            way = "forward" if self.set_by > 0 else "back"
            parts.append(f"{'the' if parts else 'The'} clock was set {way} by {say_span(abs(self.set_by))}")
        return f"{' and '.join(parts)}; the next rounds were planned anew."


class ClockGuard:
    """Looks at the clocks now and then."""

    def __init__(self, clocks: Callable[[], Clocks]) -> None:
        """Take a first look.

        Args:
            clocks: reads all three.
        """
        self._clocks = clocks
        self._last = clocks()

    def look(self) -> Moved | None:
        """What happened since the last look; None for nothing but time."""
        before, now = self._last, self._clocks()
        self._last = now
        steady = now.steady - before.steady
        set_by = (now.wall - before.wall) - steady
        slept = steady - (now.awake - before.awake)
        if abs(set_by) <= JUMP and slept <= JUMP:
            return None
        return Moved(set_by=set_by if abs(set_by) > JUMP else 0.0, slept=slept if slept > JUMP else 0.0)
