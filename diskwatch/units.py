"""Hours, bytes, days and how people say them. Pure: the current time is always handed in."""

import re
from collections.abc import Callable
from datetime import UTC, datetime

DAY = 86_400
_SPANS = {"s": 1, "m": 60, "h": 3_600, "d": DAY}
_LONGEST = 36_525 * DAY
_BYTE_STEPS = ("bytes", "kB", "MB", "GB", "TB", "PB")


def seconds_of(text: str) -> int:
    """Read a duration such as ``1s``, ``30m``, ``2h`` or ``7d``.

    Returns:
        Whole seconds, at least 1.

    Raises:
        ValueError: the text is no such duration, shorter than a second or longer than a century; says what is
            expected.
    """
    found = re.fullmatch(r"\s*([0-9]{1,9})\s*([smhd])\s*", text)
    seconds = int(found[1]) * _SPANS[found[2]] if found is not None else 0
    if seconds == 0:
        raise ValueError(f"expected a duration such as 1s, 30m, 2h or 7d, at least 1s, not {text[:60]!r}")
    if seconds > _LONGEST:
        raise ValueError(f"expected a duration of at most 36525d, not {text[:60]!r}")
    return seconds


def day_number(at: int) -> int:
    """The UTC day that a time lies on, counted from 1970-01-01."""
    return at // DAY


def rfc3339(at: int) -> str:
    """A time as RFC 3339 writes it, in UTC: ``2026-12-01T12:00:00Z``."""
    return datetime.fromtimestamp(at, UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def epoch_of(text: str) -> int:
    """Read an RFC 3339 time; a bare date means its first second in UTC.

    Returns:
        UTC seconds since 1970.

    Raises:
        ValueError: the text is no such time.
    """
    moment = datetime.fromisoformat(text)
    if moment.tzinfo is None:
        moment = moment.replace(tzinfo=UTC)
    return int(moment.timestamp())


def say_bytes(count: int) -> str:
    """An amount of data for a person, decimal as makers count: ``12 TB``, ``960 GB``, ``4.2 MB``."""
    amount = float(count)
    step = 0
    while amount >= 999.5 and step < len(_BYTE_STEPS) - 1:
        amount /= 1000
        step += 1
    if step == 0:
        return f"{count} bytes"
    digits = f"{amount:.1f}".removesuffix(".0") if amount < 9.95 else f"{amount:.0f}"
    return f"{digits} {_BYTE_STEPS[step]}"


def say_count(count: int) -> str:
    """A count for a person, thousands set apart: ``1,265``."""
    return f"{count:,}"


def say_span(seconds: float) -> str:
    """A length of time for a person, in its largest fitting unit: ``50 seconds``, ``3 days``, ``2 years``."""
    for size, name in (
        (365.25 * DAY, "year"),
        (30.4375 * DAY, "month"),
        (DAY, "day"),
        (3_600, "hour"),
        (60, "minute"),
    ):
        if seconds >= size * (2 if name in {"year", "month"} else 1):
            return _plural(int(seconds / size), name)
    return _plural(int(seconds), "second")


def say_days(days: float) -> str:
    """A length of time given in days, for a person."""
    return say_span(days * DAY)


def once_in(days: float) -> str:
    """Evidence in days, said as "once in N years", rounded down to two digits, between 1 and 1,000."""
    years = days / 365.25
    if years < 1:
        return "once a year or more often"
    if years >= 1000:
        return "once in more than 1,000 years"
    scale = 10 ** max(0, len(str(int(years))) - 2)
    rounded = int(years) // scale * scale
    return f"once in {say_count(rounded)} {'year' if rounded == 1 else 'years'}"


def _plural(count: int, name: str) -> str:
    return f"{count} {name}" if count == 1 else f"{count} {name}s"


_ACTIVE = re.compile(
    r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ud800-\udfff"
    r"\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069\u2028\u2029\ufeff]"
)
_BLANKS = str.maketrans("\t\n\r", "   ")


def plain(text: str) -> str:
    r"""Text from outside made harmless for a terminal or a log.

    Control characters, escapes and characters that change the direction of writing become visible
    ``\\xNN`` or ``\\uNNNN`` marks; line ends and tabs become a blank.
    """
    return without_active(text.translate(_BLANKS), _mark)


def is_active(letter: str) -> bool:
    """Whether a terminal may act on a letter instead of showing it; line ends and tabs do not count."""
    return _ACTIVE.match(letter) is not None


def without_active(text: str, mark: Callable[[str], str]) -> str:
    """Text in which a mark stands for every letter that a terminal may act on instead of showing it."""
    return _ACTIVE.sub(lambda found: mark(found[0]), text)


def _mark(letter: str) -> str:
    code = ord(letter)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}"
