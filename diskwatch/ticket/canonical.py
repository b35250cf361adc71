"""The one way to write a document, so that its digest means the same to everybody: RFC 8785. Pure.

Written out here, 60 lines, so that the package that does the same stays an independent check in the tests.
"""

import hashlib
import math
import re
from collections.abc import Iterator, Mapping, Sequence
from json.encoder import encode_basestring

EXACT = 2**53
"""Whole numbers beyond this become strings: readers of JSON need not hold them exactly (RFC 8259, 6)."""

_HALF = re.compile("[\ud800-\udfff]")
_PLAIN_DIGITS = 21
"""Digits before the point from which on a number gets an exponent (ECMAScript, Number::toString)."""


def written(thing: object) -> bytes:
    """A JSON value in its canonical form, UTF-8.

    Raises:
        ValueError: it holds what JSON or RFC 8785 cannot: a number that is none, a whole number beyond 2^53,
            half of a surrogate pair, a thing that is no JSON value.
    """
    return "".join(_pieces(thing)).encode("utf-8")


def digest(document: Mapping[str, object]) -> str:
    """SHA-256 over the canonical form of a document without its member ``digest``, in hexadecimal."""
    return hashlib.sha256(
        written({key: value for key, value in document.items() if key != "digest"})
    ).hexdigest()


def storable(thing: object) -> object:
    """A value as it can stand in a ticket.

    Whole numbers beyond 2^53 become strings, numbers that are none are not known, halves of surrogate pairs
    become escapes.
    """
    if thing is None or isinstance(thing, bool):
        return thing
    if isinstance(thing, int):
        return int(thing) if -EXACT <= thing <= EXACT else str(thing)
    if isinstance(thing, float):
        return float(thing) if math.isfinite(thing) else None
    if isinstance(thing, str):
        return _proper(thing)
    if isinstance(thing, Mapping):
        return {_proper(str(key)): storable(value) for key, value in thing.items()}
    if isinstance(thing, Sequence):
        return [storable(value) for value in thing]
    return _proper(str(thing))


def _proper(words: str) -> str:
    return words.encode("utf-8", "backslashreplace").decode("utf-8")


def _pieces(thing: object) -> Iterator[str]:
    if isinstance(thing, Mapping):
        yield "{"
        for place, key in enumerate(sorted(thing, key=_in_order)):
            yield ("," if place else "") + _text(key) + ":"
            yield from _pieces(thing[key])
        yield "}"
    elif isinstance(thing, Sequence) and not isinstance(thing, str):
        yield "["
        for place, value in enumerate(thing):
            if place:
                yield ","
            yield from _pieces(value)
        yield "]"
    else:
        yield _single(thing)


def _single(thing: object) -> str:
    if thing is None or isinstance(thing, bool):
        return "null" if thing is None else str(thing).lower()
    if isinstance(thing, str):
        return _text(thing)
    if isinstance(thing, float):
        return number(thing)
    if isinstance(thing, int) and -EXACT <= thing <= EXACT:
        return str(thing)
    raise ValueError(f"no JSON value, or a whole number beyond 2^53 that must be a string: {thing!r}")


def _in_order(key: object) -> bytes:
    """Keys stand in the order of their UTF-16 code units (RFC 8785, 3.2.3)."""
    if not isinstance(key, str):
        raise ValueError(f"a key that is no text: {key!r}")  # noqa: TRY004  # as every other fault here
    return key.encode("utf-16-be", "surrogatepass")


def _text(words: str) -> str:
    if _HALF.search(words) is not None:
        raise ValueError(f"half of a surrogate pair in {words[:40]!a}")
    return encode_basestring(words)


def number(value: float) -> str:
    """A number as ECMAScript writes it (RFC 8785, 3.2.2.3): the shortest digits that come back to it.

    Raises:
        ValueError: it is none.
    """
    if not math.isfinite(value):
        raise ValueError(f"no number that JSON has: {value}")
    if value == 0:
        return "0"
    # Python's repr finds the same shortest digits; only where the point goes differs.
    mantissa, _, exponent = f"{abs(value)!r}".partition("e")
    whole, _, part = mantissa.partition(".")
    digits = (whole + ("" if part == "0" else part)).lstrip("0")
    point = len(whole.lstrip("0")) + int(exponent or 0)
    if not whole.lstrip("0"):
        point -= len(part) - len(part.lstrip("0"))
    if part == "0" or not part:
        digits = digits.rstrip("0")
    return ("-" if value < 0 else "") + _placed(digits or "0", point)


def _placed(digits: str, point: int) -> str:
    """Digits with their point after so many of them."""
    count = len(digits)
    if count <= point <= _PLAIN_DIGITS:
        return digits + "0" * (point - count)
    if 0 < point <= _PLAIN_DIGITS:
        return f"{digits[:point]}.{digits[point:]}"
    if -6 < point <= 0:
        return "0." + "0" * -point + digits
    exponent = point - 1
    fraction = f".{digits[1:]}" if count > 1 else ""
    return f"{digits[0]}{fraction}e{'+' if exponent > 0 else '-'}{abs(exponent)}"
