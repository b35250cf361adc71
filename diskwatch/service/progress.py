"""Whether the watch gets on with its work. Pure: the time is handed in.

systemd's watchdog is fed by this and not by a timer of its own: a process that lives and does nothing any more
is to be started anew.
"""

from dataclasses import dataclass


@dataclass(slots=True)
class _Work:
    limit: float
    last: float


class Progress:
    """What was done when, by kinds of work."""

    def __init__(self) -> None:
        """Expect nothing yet."""
        self._works: dict[str, _Work] = {}

    def expect(self, name: str, limit: float, now: float) -> None:
        """Expect that a kind of work is done again and again.

        Args:
            name: what it is called.
            limit: seconds that may pass between two times, at most.
            now: seconds of a clock that nobody sets.
        """
        self._works[name] = _Work(limit=limit, last=now)

    def done(self, name: str, now: float) -> None:
        """It was done; what nobody expects is no matter."""
        if name in self._works:
            self._works[name].last = now

    def late(self, now: float) -> tuple[str, ...]:
        """Kinds of work that were not done for too long."""
        return tuple(name for name, work in self._works.items() if now - work.last > work.limit)
