"""Whether a drive's requests stand still, decided from successive looks at its counters. Pure.

A disk that hangs completes nothing, like an idle one. What tells them apart is that something is under way.
As long as no request comes to an end between two looks, those that were under way at the first are under way
still. A flush that hangs alone is not seen: the kernel does not count it among the requests under way.
"""

from dataclasses import dataclass

from diskwatch.machine.counters import completed
from diskwatch.machine.protocol import Counted

HUNG = 30.0
"""Seconds without a single answer that count as hung: what Linux gives one command of a disk before it resets
the link (from memory; ``device/timeout`` of a SCSI disk and the option ``nvme_core.io_timeout`` hold it)."""

_EARLY = 0.5  # a look that is due every ten seconds may come that much before its time


@dataclass(frozen=True, slots=True, kw_only=True)
class Standing:
    """What one look adds to the looks before.

    Attributes:
        instance: which device it is.
        completed: requests that came to an end since the device appeared.
        at: when, seconds by a clock that only moves forward and stands still while the machine sleeps.
        since: since when requests have been under way and none came to an end, by the same clock; None where
            nothing is under way, or the kernel does not say.
        in_flight: requests under way at this look.
    """

    instance: str
    completed: int
    at: float
    since: float | None
    in_flight: int

    @property
    def seconds(self) -> float:
        """For how long nothing has moved; 0.0 where something does, or nothing has to."""
        return 0.0 if self.since is None else self.at - self.since

    @property
    def hung(self) -> bool:
        """Whether it has been long enough to say so."""
        return self.seconds >= HUNG - _EARLY


def looked(before: Standing | None, now: Counted, at: float) -> Standing:
    """Take in one look.

    Args:
        before: what the look before came to; None at the first.
        now: the totals and requests under way.
        at: when, seconds by a clock that only moves forward.
    """
    done = completed(now.counts)
    since = None
    if now.in_flight:
        still = before is not None and before.instance == now.instance and before.completed == done
        since = before.since if still and before is not None and before.since is not None else at
    return Standing(instance=now.instance, completed=done, at=at, since=since, in_flight=now.in_flight or 0)
