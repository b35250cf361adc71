"""The spans of time that a screen can show. Pure."""

from collections.abc import Mapping

from diskwatch.units import DAY

SPANS: Mapping[str, int] = {"day": DAY, "week": 7 * DAY, "month": 30 * DAY, "year": 365 * DAY}
"""Seconds by name; ``all`` is the rest of them, from the first sight of a drive on."""

ALL = "all"


def begin_of(span: str, first_seen: int, now: int) -> int:
    """Where a span begins.

    Args:
        span: ``day``, ``week``, ``month``, ``year`` or ``all``.
        first_seen: when the drive was first seen, UTC seconds since 1970.
        now: the current time, likewise.

    Returns:
        UTC seconds since 1970; for ``all`` the first sight of the drive, at least a day ago.
    """
    length = SPANS.get(span)
    return min(first_seen, now - DAY) if length is None else now - length


def said(span: str) -> str:
    """A span in words: ``the last month``, ``all that is known``."""
    return "all that is known" if span == ALL else f"the last {span}"
