"""Single fields of a recorded table: whole numbers, and why a row cannot be understood."""

from math import isfinite

from diskwatch.units import plain


class BadRow(ValueError):
    """A row cannot be understood; says why."""


def whole(text: str, what: str, *, negative: bool = False) -> int | None:
    """A whole number, also where it is written ``12.0``; None for an empty field."""
    try:
        number = int(text)
    except ValueError:
        if not text.strip():
            return None
        number = _from_decimal(text, what)
    if number < 0 and not negative:
        raise BadRow(f"{what} is {number}, below 0")
    return number


def _from_decimal(text: str, what: str) -> int:
    try:
        exact = float(text)
    except ValueError:
        exact = float("nan")
    if not isfinite(exact) or exact != int(exact):
        raise BadRow(f"{what} is {plain(text[:40])!r}, no whole number")
    return int(exact)
