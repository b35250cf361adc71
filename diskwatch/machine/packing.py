"""From the raw value of an ATA attribute, as smartctl prints it, to a number that may be followed.

smartctl prints the 48 bits as its table of drives says: whole, as words, as hours, with a remark in brackets.
Where its table does not know the drive a packed value comes out as one huge number. A value that cannot be
understood, is full to the brim or cannot be true is None, with the reason.
"""

import re

Decoded = tuple[int | None, str | None]
"""The value and None, or None and the reason why there is no value."""

PACKED = "the raw value is packed in a way that is not known"
FULL = "the counter stands at the most that its field can hold"
_IMPOSSIBLE = "the drive states a value that cannot be true"

_WIDE_FIELDS = frozenset({2**24 - 1, 2**32 - 1, 2**48 - 1})
_FULL_FIELDS = _WIDE_FIELDS | {2**16 - 1}
_MOST_HOURS = 350_640
"""40 years: none has been powered for longer than there are ATA drives (since 1986, from memory)."""

_MOST = 2**128 * 2**20
"""No field of a drive has more than 128 bits, and no unit of one more than 2^20 bytes."""

_PER_UNIT = {"hours": _MOST_HOURS, "bits": 0xFF, "percent": 100}
"""The most that can be true."""

_MOST_USED = 255
"""Percent of rated endurance; it ends where its byte does (NVM Express, log 02h, byte 5)."""

COLDEST, HOTTEST = -60, 150
"""No drive works beyond these temperatures, degrees Celsius (common practice, no source)."""

_NUMBER = re.compile(r"([0-9]{1,20})(?:\s*\(.*\))?")
_EXTREMES = re.compile(r"-?[0-9]{1,3}\s*\(Min/Max (-?[0-9]{1,3})/(-?[0-9]{1,3})(?: .*)?\)")


def count(raw: str) -> Decoded:
    """A plain count: ``1265``, or ``0 (2000 0)`` with a remark behind it."""
    found = _NUMBER.fullmatch(raw)
    if found is None:
        return None, PACKED
    return _sane_count(int(found[1]))


def volume(raw: str) -> Decoded:
    """A count of blocks or larger units: whole, of up to 48 bits."""
    if re.fullmatch(r"[0-9]{1,20}", raw) is None:
        return None, PACKED
    number = int(raw)
    return (None, FULL) if number in {2**32 - 1, 2**48 - 1} else (number, None)


def words(raw: str) -> tuple[int, int, int] | None:
    """Three 16-bit words, low one first: ``1 2 3`` with the high word first, or all three as one number.

    One number is taken for three words where it is too large for a count, and where they do not rise from
    the low one up: what took longer is among what took long. Else it cannot be told from a count.
    """
    printed = re.fullmatch(r"([0-9]{1,5}) ([0-9]{1,5}) ([0-9]{1,5})", raw)
    if printed is not None:
        high, middle, low = (int(word) for word in printed.groups())
        return (low, middle, high) if max(low, middle, high) <= 0xFFFF else None
    found = _NUMBER.fullmatch(raw)
    if found is None or not 2**32 <= int(found[1]) < 2**48:
        return None
    number = int(found[1])
    low, middle, high = (number >> shift & 0xFFFF for shift in (0, 16, 32))
    return (low, middle, high) if low >= middle >= high else None


def low_word(raw: str) -> Decoded:
    """A count that may share its field with two others, see `words`."""
    parts = words(raw)
    if parts is not None:
        return _sane_count(parts[0])
    found = _NUMBER.fullmatch(raw)
    if found is None or int(found[1]) > 0xFFFF:
        return None, PACKED
    return _sane_count(int(found[1]))


def middle_word(raw: str) -> Decoded:
    """The second of three counts that share a field, see `words`."""
    parts = words(raw)
    return _sane_count(parts[1]) if parts is not None else (None, PACKED)


def high_word(raw: str) -> Decoded:
    """The third of three counts that share a field, see `words`."""
    parts = words(raw)
    return _sane_count(parts[2]) if parts is not None else (None, PACKED)


def first_of_pair(raw: str) -> Decoded:
    """A count, or the first of two of 24 bits that share the field: ``1204/1177``, or both as one number.

    One number is taken for two where they are the same but for one, as loads and unloads are. A count of
    this sort does go beyond 16 bits.
    """
    pair = re.fullmatch(r"([0-9]{1,8})/[0-9]{1,8}", raw)
    found = _NUMBER.fullmatch(pair[1] if pair is not None else raw)
    if found is None:
        return None, PACKED
    number = int(found[1])
    if number in _WIDE_FIELDS:
        return None, FULL
    if number < 2**24:
        return number, None
    first, second = number & 0xFFFFFF, number >> 24
    return (first, None) if abs(first - second) <= 1 else (None, PACKED)


def rate(raw: str, *, packs: bool) -> tuple[int, int] | None:
    """How many errors in how many operations: ``0/60234824``, or errors above 32 bits of operations.

    Args:
        raw: as printed.
        packs: whether the maker is known to pack the two into one number.
    """
    pair = re.fullmatch(r"([0-9]{1,8})/([0-9]{1,10})", raw)
    if pair is not None:
        return int(pair[1]), int(pair[2])
    if not packs or re.fullmatch(r"[0-9]{1,15}", raw) is None or int(raw) >= 2**48:
        return None
    return int(raw) >> 32, int(raw) & 0xFFFFFFFF


def hours(raw: str) -> Decoded:
    """Hours: ``33124``, ``33124h+17m``, ``33124h+17m+05.250s``; a larger number holds more than hours."""
    found = _NUMBER.fullmatch(raw)
    if found is None:
        return stated_hours(raw)
    # smartctl prints finer parts apart where it knows that they are there (its manual page, raw24(raw8)).
    return (None, PACKED) if int(found[1]) >= 2**24 else sane_hours(int(found[1]))


def stated_hours(raw: str) -> Decoded:
    """Hours only where they are printed as such: a bare number counts minutes, seconds or half minutes."""
    found = re.fullmatch(r"([0-9]{1,10})h(?:\+[0-9]{1,2}m)?(?:\+[0-9.]{1,6}s)?", raw)
    return sane_hours(int(found[1])) if found is not None else (None, PACKED)


def celsius(raw: str) -> Decoded:
    """Degrees: ``41``, ``41 (Min/Max 20/45)``, or packed with the current one in the low byte."""
    found = re.fullmatch(r"(-?[0-9]{1,20})(?:\s*\(.*\))?", raw)
    if found is None:
        return None, PACKED
    number = int(found[1])
    if number > 0xFFFF:
        number &= 0xFF  # least, greatest and other bytes lie above it (smartctl's manual page, tempminmax)
        if number == 0:
            return None, PACKED
    return sane_celsius(number)


def lowest_celsius(raw: str) -> Decoded:
    """The least temperature in ``41 (Min/Max 20/45)``."""
    found = _EXTREMES.fullmatch(raw)
    return sane_celsius(int(found[1])) if found is not None else (None, PACKED)


def highest_celsius(raw: str) -> Decoded:
    """The greatest temperature in ``41 (Min/Max 20/45)``."""
    found = _EXTREMES.fullmatch(raw)
    return sane_celsius(int(found[2])) if found is not None else (None, PACKED)


def sane_celsius(number: int) -> Decoded:
    """A temperature, unless no drive can have it."""
    return (number, None) if COLDEST <= number <= HOTTEST else (None, _IMPOSSIBLE)


def sane_hours(number: int) -> Decoded:
    """Powered hours, unless no drive can have so many, or so few."""
    return (number, None) if 0 <= number <= _MOST_HOURS else (None, _IMPOSSIBLE)


def sane(number: int, unit: str, signal: str = "") -> Decoded:
    """Any number of a drive, unless its unit shows that it cannot be true: only temperatures go below zero."""
    if unit == "celsius":
        return sane_celsius(number)
    most = _MOST_USED if signal == "percentage-used" else _PER_UNIT.get(unit, _MOST)
    return (number, None) if 0 <= number <= most else (None, _IMPOSSIBLE)


def _sane_count(number: int) -> Decoded:
    if number in _FULL_FIELDS:
        return None, FULL
    # No drive counts so many events; the number is several counts side by side.
    return (number, None) if number < 2**32 else (None, PACKED)
