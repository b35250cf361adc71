"""Where the dashboard's data come from: asked in one thread, wrapped into one frozen snapshot."""

from collections.abc import Callable
from dataclasses import dataclass, replace

from diskwatch.errors import DiskwatchError
from diskwatch.records import Bays


@dataclass(frozen=True, slots=True, kw_only=True)
class Snapshot:
    """All that the screen knows at one moment.

    Attributes:
        bays: the drives as last known; None before they were first known.
        error: why they could not be asked for just now, one sentence; None where they could.
    """

    bays: Bays | None
    error: str | None


class Feed:
    """Asks a source for the drives and tells what is new.

    The source is never asked twice at the same time.
    """

    def __init__(self, source: Callable[[int], Bays], now: Callable[[], int]) -> None:
        """Take the source; it is not asked yet.

        Args:
            source: gives the drives at a time, UTC seconds since 1970; may raise `DiskwatchError`.
            now: the clock, UTC seconds since 1970.
        """
        self._source = source
        self._now = now
        self._last: Snapshot | None = None

    def look(self) -> Snapshot | None:
        """Ask the source once.

        Where it fails, the drives as last known stay beside the error: a history that is out of reach for a
        second must not take a standing call off the screen.

        Returns:
            The snapshot, or None where nothing but the time differs from the one before.
        """
        before = self._last
        try:
            fresh = Snapshot(bays=self._source(self._now()), error=None)
        except DiskwatchError as error:
            fresh = Snapshot(bays=before.bays if before else None, error=str(error))
        except Exception as error:  # noqa: BLE001 - a screen that stands open for weeks says a fault and goes on
            told = f"diskwatch has a fault of its own: {type(error).__name__}: {error}"
            fresh = Snapshot(bays=before.bays if before else None, error=told)
        self._last = fresh
        return None if before is not None and _timeless(before) == _timeless(fresh) else fresh


def _timeless(snapshot: Snapshot) -> Snapshot:
    """The snapshot without the moment at which it was asked for, which differs every time."""
    if snapshot.bays is None:
        return snapshot
    return replace(snapshot, bays=replace(snapshot.bays, at=0))
