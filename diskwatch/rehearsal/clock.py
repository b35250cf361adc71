"""Simulated time: it moves only when it is moved, and only forward."""

START = 1_735_689_600
"""2025-01-01T00:00:00Z: a fixed beginning, since the same seed must give the same bytes whenever it is run."""


class Clock:
    """The clock of an invented machine."""

    def __init__(self, start: int) -> None:
        """Begin.

        Args:
            start: UTC seconds since 1970.
        """
        self._start = start
        self._now = start
        self._awake = 0

    def now(self) -> int:
        """The present, UTC seconds since 1970."""
        return self._now

    def steady(self) -> float:
        """Seconds since the machine last started, as its steady clock has it."""
        return float(self._awake)

    def boot(self) -> None:
        """The machine starts: its steady clock begins anew."""
        self._awake = 0

    def days(self) -> float:
        """Days since the beginning."""
        return (self._now - self._start) / 86_400

    def forward(self, seconds: int, *, on: bool = True) -> None:
        """Let time pass.

        Args:
            seconds: how much, at least 1, so that no moment comes twice.
            on: whether the machine is on meanwhile.

        Raises:
            ValueError: time would stand still or go back.
        """
        if seconds < 1:
            raise ValueError(f"time can only move forward, not by {seconds} seconds")
        self._now += seconds
        if on:
            self._awake += seconds
