"""A row of recorded traffic: what a drive did over one interval, as differences of the kernel's counters.

Our own layout: ``time`` (RFC 3339, or seconds since 1970; the end of the interval), ``serial``, ``interval_s``,
``reads, writes, read_bytes, write_bytes, read_ms, write_ms`` and, where there is one, ``busy_ms``.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from math import isfinite
from operator import itemgetter

from diskwatch.replay.cells import BadRow, whole
from diskwatch.units import DAY, plain

COUNTS = ("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms")

_LATEST = 2**36
"""Seconds since 1970 beyond which a number is no time: the year 4147; milliseconds stand here by mistake."""


@dataclass(frozen=True, slots=True)
class TrafficLayout:
    """Where everything stands in a row.

    Attributes:
        time: index of the time.
        serial: index of the serial.
        interval: index of the interval.
        counts: indices of `COUNTS`.
    """

    time: int
    serial: int
    interval: int
    counts: tuple[int, ...]


def traffic_layout_of(header: Sequence[str]) -> TrafficLayout | None:
    """Recognise the layout by its header; None where it is another."""
    where = {name.strip().casefold(): index for index, name in enumerate(header)}
    if not where.keys() >= {"time", "serial", "interval_s", *COUNTS}:
        return None
    return TrafficLayout(
        time=where["time"],
        serial=where["serial"],
        interval=where["interval_s"],
        counts=tuple(where[name] for name in COUNTS),
    )


@dataclass(slots=True)
class Stretch:
    """One drive over one interval; not frozen, since a million of them is made.

    Attributes:
        serial: serial as recorded.
        at: end of the interval, UTC seconds since 1970.
        seconds: its length.
        counts: differences over it, in the order of `COUNTS`.
    """

    serial: str
    at: int
    seconds: float
    counts: tuple[int, ...]


class Stretches:
    """Reads rows of one table of traffic."""

    def __init__(self, layout: TrafficLayout) -> None:
        """Begin.

        Args:
            layout: where everything stands in a row.
        """
        self._layout = layout
        self._counts = itemgetter(*layout.counts)

    def row(self, fields: Sequence[str], serial: str) -> Stretch:
        """One row.

        Args:
            fields: as many as the first line has.
            serial: the drive's, as recorded.

        Raises:
            BadRow: it cannot be understood; says why.
        """
        texts = self._counts(fields)
        try:
            counts = tuple(map(int, texts))
        except ValueError:
            counts = tuple(_count(text, name) for text, name in zip(texts, COUNTS, strict=True))
        if min(counts) < 0:
            name, count = next((name, one) for name, one in zip(COUNTS, counts, strict=True) if one < 0)
            raise BadRow(f"{name} is {count}, below 0")
        return Stretch(
            serial, _time(fields[self._layout.time]), _seconds(fields[self._layout.interval]), counts
        )


def _count(text: str, name: str) -> int:
    found = whole(text, name)
    if found is None:
        raise BadRow(f"{name} is empty")
    return found


def _seconds(text: str) -> float:
    try:
        seconds = float(text)
    except ValueError:
        seconds = 0.0
    if not 0 < seconds <= DAY:
        raise BadRow(f"interval_s is {plain(text[:40])!r}, no number of seconds above 0 and up to a day")
    return seconds


def _time(text: str) -> int:
    try:
        at = float(text)
    except ValueError:
        try:
            moment = datetime.fromisoformat(text.strip())
        except ValueError:
            raise BadRow(f"{plain(text[:40])!r} is no time") from None
        return int((moment if moment.tzinfo is not None else moment.replace(tzinfo=UTC)).timestamp())
    if not isfinite(at) or not 0 <= at < _LATEST:
        raise BadRow(f"{plain(text[:40])!r} is no time in seconds since 1970")
    return int(at)
