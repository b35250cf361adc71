"""What is rewritten at nearly every pass, made small: an analyser's state, and a reading beside its values.

Packed it costs a third of the bytes, and the bytes that the watch writes are counted.
"""

import json
import struct
import zlib
from collections.abc import Mapping, Sequence
from operator import attrgetter
from typing import Any

from diskwatch.records import Attribute, Failing, Reading, SelfTest

_LEVEL = 4
"""Of zlib's nine: a state takes 1 % more room than with the usual sixth, and a fifth less time."""


def packed(words: str) -> bytes:
    """Text made small for a column that is rewritten often."""
    return zlib.compress(words.encode("utf-8", "surrogatepass"), _LEVEL)


def unpacked(kept: bytes) -> str:
    """The text that ``packed`` was given.

    Raises:
        ValueError: these bytes are not what it wrote.
    """
    try:
        return zlib.decompress(kept).decode("utf-8", "surrogatepass")
    except zlib.error as error:
        raise ValueError(f"packed text is damaged: {error}") from error


def reading_packed(reading: Reading) -> bytes:
    """All of a reading but its values, which stand in the series."""
    return packed(_told(reading, reading.attributes))


def beside_bytes(found: Reading) -> bytes:
    """What a judgement rests on beside the values: attributes that fail now, self-tests, limits.

    It is compared at every pass and written once in a long while, so it is not packed.
    """
    failing = tuple(one for one in found.attributes if one.failing is Failing.NOW)
    return _told(found, failing).encode("utf-8", "surrogatepass")


def beside(kept: bytes) -> Reading:
    """A reading with what `beside_bytes` gave.

    Raises:
        ValueError: these bytes are not what it wrote.
    """
    return _reading(kept.decode("utf-8", "surrogatepass"))


_ENCODER = json.JSONEncoder(separators=(",", ":"))
_ATTRIBUTE = attrgetter("number", "name", "value", "worst", "threshold", "prefail", "raw", "failing")
_SELF_TEST = attrgetter("name", "result", "extended", "passed", "unreadable", "hours", "lba")
"""What is kept of each, in the order in which it is read back."""


def _told(reading: Reading, attributes: Sequence[Attribute]) -> str:
    return _ENCODER.encode(
        {
            "attributes": [*map(_ATTRIBUTE, attributes)],
            "self_tests": [*map(_SELF_TEST, reading.self_tests)],
            "limits": [reading.warning_celsius, reading.critical_celsius],
        }
    )


_BIN = struct.Struct("<hH")
"""A bin of a histogram and its count; a day has 288 roll-ups of a drive, twice that where it is lived twice."""


def histogram_packed(counts: Mapping[int, int]) -> bytes:
    """A sparse histogram, four bytes a bin.

    Raises:
        ValueError: a bin or a count has no room.
    """
    try:
        return b"".join(_BIN.pack(bin_, count) for bin_, count in sorted(counts.items()))
    except struct.error as error:
        raise ValueError(f"no histogram of one day: {error}") from error


def histogram(kept: bytes) -> dict[int, int]:
    """The histogram that `histogram_packed` was given.

    Raises:
        ValueError: these bytes are not what it wrote.
    """
    try:
        return dict(_BIN.iter_unpack(kept))
    except struct.error as error:
        raise ValueError(f"packed histogram is damaged: {error}") from error


def reading(kept: bytes) -> Reading:
    """A reading without its values, from what `reading_packed` gave.

    Raises:
        ValueError: these bytes are not what it wrote.
    """
    return _reading(unpacked(kept))


def _reading(words: str) -> Reading:
    try:
        found: dict[str, Any] = json.loads(words)
        warning, critical = found["limits"]
    except (KeyError, TypeError) as error:
        raise ValueError(f"no reading: {error}") from error
    return Reading(
        attributes=tuple(_attribute(row) for row in found["attributes"]),
        self_tests=tuple(_self_test(row) for row in found["self_tests"]),
        warning_celsius=warning,
        critical_celsius=critical,
    )


def _attribute(row: list[Any]) -> Attribute:
    number, name, value, worst, threshold, prefail, raw, failing = row
    return Attribute(
        number=number,
        name=name,
        value=value,
        worst=worst,
        threshold=threshold,
        prefail=prefail,
        raw=raw,
        failing=None if failing is None else Failing(failing),
    )


def _self_test(row: list[Any]) -> SelfTest:
    name, result, extended, passed, unreadable, hours, lba = row
    return SelfTest(
        name=name,
        result=result,
        extended=extended,
        passed=passed,
        unreadable=unreadable,
        hours=hours,
        lba=lba,
    )
