"""What the owner has said of a drive, in words."""

from collections.abc import Iterator
from datetime import date

from diskwatch.records import DriveLine
from diskwatch.units import day_number

_EPOCH = date(1970, 1, 1)


def said(line: DriveLine, now: int) -> str | None:
    """The owner's facts beside the label, in one sentence; None where there are none.

    Args:
        line: the drive.
        now: UTC seconds since 1970.
    """
    told = ", ".join(_parts(line, day_number(now)))
    return f"You said: {told}." if told else None


def _parts(line: DriveLine, today: int) -> Iterator[str]:
    owner = line.owner
    if owner.asset is not None:
        yield f"asset {owner.asset}"
    if owner.warranty_until is not None:
        over = _day(owner.warranty_until) < today
        yield f"its warranty {'ended' if over else 'lasts until'} {'on ' if over else ''}{owner.warranty_until}"
    if owner.backed_up is not None:
        yield f"backed up on {owner.backed_up}, {days_ago(owner.backed_up, today)}"


def days_ago(day: str, today: int) -> str:
    """How long ago a day was.

    Args:
        day: ``2026-11-20``.
        today: UTC day number, counted from 1970-01-01.
    """
    gone = today - _day(day)
    if gone <= 0:
        return "today"
    return "yesterday" if gone == 1 else f"{gone:,} days ago"


def _day(text: str) -> int:
    return (date.fromisoformat(text) - _EPOCH).days
