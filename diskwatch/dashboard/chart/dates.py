"""Where the hours, days, months and years of an axis stand, and how people write them. Pure."""

from collections.abc import Iterator
from datetime import UTC, datetime, timedelta, tzinfo

from diskwatch.units import DAY

_ROOM = 9
"""Columns that one date and the blank beside it take."""

_HOURS = (1, 3, 6, 12)
_DAYS = (1, 2, 7, 14)
_MONTHS = (1, 3, 6, 12, 24, 60, 120)


def date_marks(since: int, until: int, columns: int, zone: tzinfo | None = None) -> tuple[tuple[int, str], ...]:
    """Moments for an axis, each with its text, as many as have room.

    Args:
        since: where the axis begins, UTC seconds since 1970.
        until: where it ends, later.
        columns: how wide it is.
        zone: the zone to say them in; None for the host's own.

    Returns:
        ``(at, text)``, oldest first: hours as ``14:00``, days as ``3 Dec``,
        months as ``Dec``, years as ``2026``.
    """
    most = max(columns // _ROOM, 1)
    for marks in _steps(since, until, zone):
        found = []
        for mark in marks:
            found.append(mark)
            if len(found) > most:
                break
        else:
            return tuple(found)
    return ()


def _steps(since: int, until: int, zone: tzinfo | None) -> Iterator[Iterator[tuple[int, str]]]:
    start = datetime.fromtimestamp(since, UTC).astimezone(zone)
    if until - since <= 10 * DAY:
        for hours in _HOURS:
            yield _hourly(start, hours, until)
    for days in _DAYS:
        yield _daily(start, days, until)
    for months in _MONTHS:
        yield _monthly(start, months, until)


def _hourly(start: datetime, step: int, until: int) -> Iterator[tuple[int, str]]:
    at = start.replace(minute=0, second=0, microsecond=0) + timedelta(hours=1)
    while at.timestamp() < until:
        if at.hour % step == 0:
            yield int(at.timestamp()), f"{at:%H:%M}" if at.hour else f"{at.day} {at:%b}"
        at += timedelta(hours=1)


def _daily(start: datetime, step: int, until: int) -> Iterator[tuple[int, str]]:
    at = start.replace(hour=0, minute=0, second=0, microsecond=0) + timedelta(days=1)
    while at.timestamp() < until:
        if at.toordinal() % step == 1 % step:  # weeks begin on Monday, as day 1 of year 1 did
            yield int(at.timestamp()), f"{at.day} {at:%b}"
        at += timedelta(days=1)


def _monthly(start: datetime, step: int, until: int) -> Iterator[tuple[int, str]]:
    month = start.year * 12 + start.month
    while True:
        year, number = divmod(month, 12)
        if year > 9000:
            return
        at = start.replace(year=year, month=number + 1, day=1, hour=0, minute=0, second=0, microsecond=0)
        if at.timestamp() >= until:
            return
        if month % step == 0:
            yield int(at.timestamp()), f"{year}" if number == 0 else f"{at:%b}"
        month += 1
