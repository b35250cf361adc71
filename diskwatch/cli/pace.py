"""How fast an invented machine's time passes while somebody looks on: halved, doubled, halted, stepped."""

import time
from threading import Condition

SLOWEST, FASTEST = 1 / 64, 64.0
USUAL = 2.0
"""Days a second where nobody asks for another pace: a scenario of months then takes a minute or two."""


class Pace:
    """Shared by the thread that lives through the days and the one that takes keys."""

    def __init__(self, speed: float | None) -> None:
        """Begin.

        Args:
            speed: days a second; None for as fast as it goes.
        """
        self._speed = speed
        self._halted = False
        self._ended = False
        self._lived = 0.0
        self._until: float | None = None
        self._changed = Condition()

    @property
    def speed(self) -> float | None:
        """Days a second; None for as fast as it goes."""
        return self._speed

    @property
    def halted(self) -> bool:
        """Whether time stands still."""
        return self._halted

    def passed(self, days: float) -> bool:
        """So many days were lived; wait until the next may be.

        Returns:
            Whether there is a next: False once it was ended.
        """
        with self._changed:
            self._lived += days
            if self._until is not None and self._lived >= self._until:
                self._until, self._halted = None, True
            begun = time.monotonic()
            while not self._ended:
                if self._halted:
                    self._changed.wait()
                    continue
                left = 0.0 if self._speed is None else begun + days / self._speed - time.monotonic()
                if left <= 0:
                    break
                self._changed.wait(left)
            return not self._ended

    def change(self, factor: float) -> None:
        """Let time pass so many times as fast, within reason."""
        with self._changed:
            self._speed = min(max((self._speed or FASTEST) * factor, SLOWEST), FASTEST)
            self._changed.notify_all()

    def halt(self) -> None:
        """Let time stand still, or go on."""
        with self._changed:
            self._halted, self._until = not self._halted, None
            self._changed.notify_all()

    def step(self, days: float = 1.0) -> None:
        """Let so many days pass, then stand still."""
        with self._changed:
            self._halted, self._until = False, self._lived + days
            self._changed.notify_all()

    def end(self) -> None:
        """No day passes any more."""
        with self._changed:
            self._ended = True
            self._changed.notify_all()
