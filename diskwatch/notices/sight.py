"""What the agent sees of the history at one look, and whether anybody is watching."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.history.later import name_of
from diskwatch.history.reader import Past
from diskwatch.records import Bays, DriveLine
from diskwatch.units import DAY, say_span

STALE = 2 * DAY
"""Seconds without any pass after which nothing is known of the drives: all that are awake are asked daily."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sight:
    """One look.

    Attributes:
        lines: the drives, by their lasting names.
        trouble: why what happens to a drive now may go unseen, one sentence; None where somebody is watching.
    """

    lines: Mapping[str, DriveLine] = field(default_factory=dict)
    trouble: str | None = None


def look(folder: Callable[[], Path], now: int) -> Sight:
    """Look at the history.

    Args:
        folder: where it lies; asked each time, since a history can be moved.
        now: UTC seconds since 1970.
    """
    try:
        with Past.open(folder()) as past:
            return seen(past.bays(now))
    except DiskwatchError as error:
        return Sight(trouble=f"The history of the drives cannot be read: {error}.")


def seen(bays: Bays) -> Sight:
    """What the bays show.

    Args:
        bays: all drives at one moment.
    """
    return Sight(lines={name_of(line.drive.identity): line for line in bays.drives}, trouble=_trouble(bays))


def _trouble(bays: Bays) -> str | None:
    if bays.watcher is None:
        return f"Nobody is watching the drives{_since(bays)}."
    if bays.trouble:
        return f"The watch has trouble: {' '.join(bays.trouble)}"
    asked = [line for line in bays.drives if line.left_out is None]
    last = max((line.last_pass.at for line in asked if line.last_pass is not None), default=None)
    if last is not None and bays.at - last > STALE:
        return f"The watch runs, but no drive has been asked for {say_span(bays.at - last)}."
    return None


def _since(bays: Bays) -> str:
    last = max((line.last_pass.at for line in bays.drives if line.last_pass is not None), default=None)
    return "" if last is None else f"; the last pass was {say_span(max(0, bays.at - last))} ago"
