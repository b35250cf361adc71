"""From the raw value of an ATA attribute, as smartctl prints it, to a number that may be followed.

smartctl prints the 48 bits as its table of drives says: whole, as words, as hours, with a remark in brackets.
Where its table does not know the drive a packed value comes out as one huge number. A value that cannot be
understood, is full to the brim or cannot be true is None, with the reason.
"""

import re

Decoded = tuple[int | None, str | None]
"""The value and None, or None and the reason why there is no value."""

_PACKED = "the raw value is packed in a way that is not known"
_FULL = "the counter stands at the most that its field can hold"
_IMPOSSIBLE = "the drive states a value that cannot be true"

_FULL_FIELDS = frozenset({2**16 - 1, 2**24 - 1, 2**32 - 1, 2**48 - 1})
_MOST_HOURS = 1_000_000
"""114 years: no drive has been powered for so long."""

COLDEST, HOTTEST = -60, 150
"""No drive works beyond these temperatures, degrees Celsius (common practice, no source)."""

_NUMBER = re.compile(r"([0-9]{1,20})(?:\s*\(.*\))?")


def count(raw: str) -> Decoded:
    """A plain count: ``1265``, or ``0 (2000 0)`` with a remark behind it."""
    found = _NUMBER.fullmatch(raw)
    if found is None:
        return None, _PACKED
    return _sane_count(int(found[1]))


def volume(raw: str) -> Decoded:
    """A count of blocks or larger units: whole, of up to 48 bits."""
    if re.fullmatch(r"[0-9]{1,20}", raw) is None:
        return None, _PACKED
    number = int(raw)
    return (None, _FULL) if number in {2**32 - 1, 2**48 - 1} else (number, None)


def low_word(raw: str) -> Decoded:
    """The low one of three 16-bit words: ``1 1 1`` with the high word first, or all three as one number."""
    words = re.fullmatch(r"[0-9]{1,5} [0-9]{1,5} ([0-9]{1,5})", raw)
    if words is not None:
        return _sane_count(int(words[1]))
    found = _NUMBER.fullmatch(raw)
    if found is None:
        return None, _PACKED
    return _sane_count(int(found[1]) & 0xFFFF)


def first_of_pair(raw: str) -> Decoded:
    """A count, or the first of two that share the field: ``1204/1177``."""
    pair = re.fullmatch(r"([0-9]{1,8})/[0-9]{1,8}", raw)
    return count(pair[1] if pair is not None else raw)


def hours(raw: str) -> Decoded:
    """Hours: ``33124``, ``33124h+17m``, ``33124h+17m+05.250s``, or packed into the low 24 bits."""
    found = _NUMBER.fullmatch(raw)
    if found is None:
        return stated_hours(raw)
    # The field holds hours in its low 24 bits and finer parts above (smartctl's manual page, raw24(raw8)).
    return sane_hours(int(found[1]) & 0xFFFFFF)


def stated_hours(raw: str) -> Decoded:
    """Hours only where they are printed as such: a bare number counts minutes, seconds or half minutes."""
    found = re.fullmatch(r"([0-9]{1,10})h(?:\+[0-9]{1,2}m)?(?:\+[0-9.]{1,6}s)?", raw)
    return sane_hours(int(found[1])) if found is not None else (None, _PACKED)


def celsius(raw: str) -> Decoded:
    """Degrees: ``41``, ``41 (Min/Max 20/45)``, or packed with the current one in the low byte."""
    found = re.fullmatch(r"(-?[0-9]{1,20})(?:\s*\(.*\))?", raw)
    if found is None:
        return None, _PACKED
    number = int(found[1])
    if number > 0xFFFF:
        number &= 0xFF  # least, greatest and other bytes lie above it (smartctl's manual page, tempminmax)
    return sane_celsius(number)


def sane_celsius(number: int) -> Decoded:
    """A temperature, unless no drive can have it."""
    return (number, None) if COLDEST <= number <= HOTTEST else (None, _IMPOSSIBLE)


def sane_hours(number: int) -> Decoded:
    """Powered hours, unless no drive can have so many, or so few."""
    return (number, None) if 0 <= number <= _MOST_HOURS else (None, _IMPOSSIBLE)


def sane(number: int, unit: str) -> Decoded:
    """Any number of a drive, unless its unit shows that it cannot be true: only temperatures go below zero."""
    if unit == "celsius":
        return sane_celsius(number)
    if unit == "hours":
        return sane_hours(number)
    return (number, None) if number >= 0 else (None, _IMPOSSIBLE)


def _sane_count(number: int) -> Decoded:
    if number in _FULL_FIELDS:
        return None, _FULL
    # No drive counts so many events; the number is several counts side by side.
    return (number, None) if number < 2**32 else (None, _PACKED)
