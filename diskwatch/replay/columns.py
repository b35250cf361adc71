"""The two layouts of recorded daily readings, and what each column means.

Ours: ``day,serial,model,bytes`` and ``a<id>_raw``, ``a<id>_norm``, with the optional columns ``failed``,
``percentage_used``, ``available_spare``, ``media_errors``, ``data_written`` (bytes), ``unsafe_power_offs``,
``critical_warning`` and ``temperature``. Open drive data as published: ``date, serial_number, model,
capacity_bytes, failure, smart_<id>_raw, smart_<id>_normalized``. One row a drive and day in both.
"""

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from diskwatch.records import SignalKind, Value

_COUNT, _GAUGE, _WEAR, _TIME = SignalKind.COUNT, SignalKind.GAUGE, SignalKind.WEAR, SignalKind.TIME

_FULL = frozenset({2**16 - 1, 2**24 - 1, 2**32 - 1, 2**48 - 1})
"""Values that a counter field cannot exceed: they say that it is full, not what was counted."""

_NO_SECTORS = 65_000
"""Sector counts from here on are not counts in the open data: 65535, 65528, 65472 and others stand there."""


def _count(number: int) -> int | None:
    return None if number in _FULL or number >= 2**32 else number


def _sectors(number: int) -> int | None:
    return None if number >= _NO_SECTORS else number


def _low_word(number: int) -> int | None:
    return _count(number & 0xFFFF)


def _hours(number: int) -> int | None:
    hours = number & 0xFFFFFF
    return hours if hours <= 1_000_000 else None


def _celsius(number: int) -> int | None:
    low = number & 0xFF if number > 0xFFFF else number
    return low if low <= 150 else None


def _same(number: int) -> int | None:
    return number


@dataclass(frozen=True, slots=True)
class Meaning:
    """What a column carries.

    Attributes:
        signal: the signal.
        unit: its unit.
        kind: how it behaves.
        usable: from the number in the file to the value, None where it cannot be one.
    """

    signal: str
    unit: str
    kind: SignalKind
    usable: Callable[[int], int | None]


_ATTRIBUTES = {
    5: Meaning("reallocated-sectors", "sectors", _COUNT, _sectors),
    9: Meaning("power-on-hours", "hours", _TIME, _hours),
    10: Meaning("spin-retries", "events", _COUNT, _count),
    12: Meaning("power-cycles", "events", _COUNT, _count),
    184: Meaning("end-to-end-errors", "errors", _COUNT, _count),
    187: Meaning("reported-uncorrectable", "errors", _COUNT, _count),
    188: Meaning("command-timeouts", "events", _COUNT, _low_word),
    194: Meaning("temperature", "celsius", _GAUGE, _celsius),
    197: Meaning("pending-sectors", "sectors", _GAUGE, _sectors),
    198: Meaning("offline-uncorrectable", "sectors", _GAUGE, _sectors),
    199: Meaning("crc-errors", "errors", _COUNT, _count),
}
"""The usual meaning of an attribute on a hard drive; a table of numbers has no names to guard it."""

_NAMED = {
    "percentage_used": Meaning("percentage-used", "percent", _WEAR, _same),
    "available_spare": Meaning("available-spare", "percent", _WEAR, _same),
    "media_errors": Meaning("media-errors", "errors", _COUNT, _same),
    "data_written": Meaning("data-written", "bytes", _COUNT, _same),
    "unsafe_power_offs": Meaning("unsafe-power-offs", "events", _COUNT, _same),
    "critical_warning": Meaning("critical-warning", "bits", _GAUGE, _same),
    "temperature": Meaning("temperature", "celsius", _GAUGE, _celsius),
}

_RAW = re.compile(r"(?:a|smart_)([0-9]{1,3})_raw")
FLASH_ONLY = frozenset({"percentage-used", "media-errors", "critical-warning"})
"""Signals that only solid-state drives have."""


@dataclass(frozen=True, slots=True)
class Layout:
    """Where everything stands in a row.

    Attributes:
        day: index of the day.
        serial: index of the serial.
        model: index of the model, or None.
        capacity: index of the size in bytes, or None.
        failed: index of the failure flag, or None.
        values: (index, meaning) of every column that carries a signal.
        width: fields that a row has.
    """

    day: int
    serial: int
    model: int | None
    capacity: int | None
    failed: int | None
    values: tuple[tuple[int, Meaning], ...]
    width: int


def layout_of(header: Sequence[str]) -> Layout | None:
    """Recognise a layout by its header; None where it is neither of the two."""
    where = {name.strip().casefold(): index for index, name in enumerate(header)}

    def first(*names: str) -> int | None:
        return next((where[name] for name in names if name in where), None)

    day, serial = first("day", "date"), first("serial", "serial_number")
    if day is None or serial is None:
        return None
    found: dict[str, tuple[int, Meaning]] = {}
    for name, index in where.items():
        raw = _RAW.fullmatch(name)
        meaning = _ATTRIBUTES.get(int(raw[1])) if raw is not None else _NAMED.get(name)
        if meaning is not None:
            found.setdefault(meaning.signal, (index, meaning))
    return Layout(
        day=day,
        serial=serial,
        model=first("model"),
        capacity=first("bytes", "capacity_bytes"),
        failed=first("failed", "failure"),
        values=tuple(found.values()),
        width=len(header),
    )


def value(meaning: Meaning, number: int) -> Value:
    """A column's number as a value; None with the reason where it cannot be one."""
    usable = meaning.usable(number)
    return Value(
        signal=meaning.signal,
        value=usable,
        unit=meaning.unit,
        kind=meaning.kind,
        source="recorded table",
        reason=None if usable is not None else "the recorded number is full or packed, so it is no count",
    )
