"""Where the dashboard's data come from: asked in one thread, wrapped into one frozen snapshot."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from diskwatch.dashboard.questions import Strand
from diskwatch.errors import DiskwatchError
from diskwatch.records import Bays


@dataclass(frozen=True, slots=True, kw_only=True)
class Snapshot:
    """All that the screen knows at one moment.

    Attributes:
        bays: the drives as last known; None before they were first known.
        error: why they could not be asked for just now, one sentence; None where they could.
        strands: each drive's line through time by its number, as far as known.
    """

    bays: Bays | None
    error: str | None
    strands: Mapping[int, Strand] = field(default_factory=dict)


class Feed:
    """Asks a source for the drives and tells what is new.

    The source is never asked twice at the same time.
    """

    def __init__(
        self,
        source: Callable[[int], Bays],
        now: Callable[[], int],
        strands: Callable[[Bays], Mapping[int, Strand]] | None = None,
    ) -> None:
        """Take the source; it is not asked yet.

        Args:
            source: gives the drives at a time, UTC seconds since 1970; may raise `DiskwatchError`.
            now: the clock, UTC seconds since 1970.
            strands: gives each drive's line through time; None where nobody does.
        """
        self._strands = strands
        self._seen: object = None
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
            bays = self._source(self._now())
            fresh = Snapshot(bays=bays, error=None, strands=self._through_time(bays))
        except DiskwatchError as error:
            fresh = replace(before or _NOTHING, error=str(error))
        except Exception as error:  # noqa: BLE001 - a screen that stands open for weeks says a fault and goes on
            told = f"diskwatch has a fault of its own: {type(error).__name__}: {error}"
            fresh = replace(before or _NOTHING, error=told)
        self._last = fresh
        return None if before is not None and _timeless(before) == _timeless(fresh) else fresh

    def _through_time(self, bays: Bays) -> Mapping[int, Strand]:
        """Every drive's line through time, asked for anew only where a pass or a call may have moved it."""
        # The drives and their calls come at once; a year of evidence follows with the next look.
        if self._strands is None or self._last is None:
            return {}
        seen = tuple((line.number, line.last_pass, line.call, line.forecasts) for line in bays.drives)
        if seen == self._seen:
            return self._last.strands
        strands = self._strands(bays)
        self._seen = seen
        return strands


_NOTHING = Snapshot(bays=None, error=None)


def _timeless(snapshot: Snapshot) -> Snapshot:
    """The snapshot without the moment at which it was asked for, which differs every time."""
    if snapshot.bays is None:
        return snapshot
    return replace(snapshot, bays=replace(snapshot.bays, at=0))
