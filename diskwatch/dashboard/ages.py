"""How long ago, and at what hour: times as people say them. Pure: the current time is always handed in."""

from datetime import UTC, datetime, tzinfo

from diskwatch.units import DAY, say_days, say_span

_CLOCKS_MAY_DIFFER = 60
_SHORT = {" seconds": " s", " minutes": " min", " minute": " min", " hours": " h", " hour": " h"}


def ago(at: int, now: int, *, short: bool = False) -> str:
    """How long ago something was.

    Args:
        at: when it was, UTC seconds since 1970.
        now: the current time, UTC seconds since 1970.
        short: whether minutes and hours are written ``min`` and ``h``.

    Returns:
        ``12 minutes ago``. Within the first minute the seconds are not told, so that a screen at rest stays at
        rest. A time more than a minute ahead is called so: a clock was set back.
    """
    passed = now - at
    if passed < -_CLOCKS_MAY_DIFFER:
        return "at a time still to come"
    if passed < 60:
        return "just now"
    span = say_span(passed)
    if short:
        for long, brief in _SHORT.items():
            if span.endswith(long):
                span = span.removesuffix(long) + brief
                break
    return f"{span} ago"


def since(at: int, now: int, zone: tzinfo | None = None) -> str:
    """Since when something stands: the weekday within the last six days, else the date.

    Args:
        at: when it began, UTC seconds since 1970.
        now: the current time, UTC seconds since 1970.
        zone: the zone to say it in; None for the host's own.
    """
    moment = _moment(at, zone)
    passed = now - at
    if 0 <= passed < DAY and moment.date() == _moment(now, zone).date():
        return f"since {moment:%H:%M}"
    if 0 <= passed < 6 * DAY:
        return f"since {moment:%A}"
    return f"since {moment.day} {moment:%B} {moment.year}"


def within(low: float, high: float) -> str:
    """Two lengths of time in days as one: ``21 to 53 days``, ``60 days to 3 months``."""
    first, last = say_days(low), say_days(high)
    (count, _, unit), other = first.rpartition(" "), last.rpartition(" ")[2]
    return f"{count if unit.rstrip('s') == other.rstrip('s') else first} to {last}"


def clock(at: int, zone: tzinfo | None = None, *, seconds: bool = False) -> str:
    """A moment by the host's clock: ``Tue 1 Dec 14:37``, or ``14:37:05`` where seconds matter."""
    moment = _moment(at, zone)
    return f"{moment:%H:%M:%S}" if seconds else f"{moment:%a} {moment.day} {moment:%b %H:%M}"


def exact(at: int, zone: tzinfo | None = None) -> str:
    """A moment to the second, with its distance from UTC: ``2026-12-01 14:37:05 +0100``."""
    return f"{_moment(at, zone):%Y-%m-%d %H:%M:%S %z}"


def _moment(at: int, zone: tzinfo | None) -> datetime:
    return datetime.fromtimestamp(at, UTC).astimezone(zone)
