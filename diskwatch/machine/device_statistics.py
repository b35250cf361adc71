"""Device Statistics, log 04h of ATA drives: what the standard fixes, and so better than any attribute.

Sources: ACS-2 and later, log address 04h, pages 01h to 07h; page numbers, offsets and names as smartctl prints
them, units from memory of the standard. Each field carries a flag that says whether it is valid; where it is
not, smartctl prints a dash, and here it counts as not there.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass

from diskwatch.machine import packing
from diskwatch.machine.document import Document, flag_at, natural_at, number_at, rows_at, text_at
from diskwatch.machine.text import Sheet, hexadecimal
from diskwatch.records import SignalKind, Value

SOURCE = "log 04h"

_NO_SECTOR = "the size of this drive's sectors is not known"
_COUNT, _GAUGE, _WEAR, _TIME = SignalKind.COUNT, SignalKind.GAUGE, SignalKind.WEAR, SignalKind.TIME

_LEAST_LIMIT = 45
"""Degrees below which a specified maximum is not believed: drives are made for 50 and more (practice), but some
state 40 and run above it for years (seen in print-outs)."""

_MAXIMUM = (5, 0x058)
_PERCENTAGE = (7, 0x008)
_SECTORS = "sectors moved"  # becomes bytes

_MEANINGS: dict[tuple[int, int], tuple[str, str, str, SignalKind]] = {
    (1, 0x008): ("Lifetime Power-On Resets", "power-on-resets", "events", _COUNT),
    (1, 0x010): ("Power-on Hours", "power-on-hours", "hours", _TIME),
    (1, 0x018): ("Logical Sectors Written", "data-written", _SECTORS, _COUNT),
    (1, 0x020): ("Number of Write Commands", "write-commands", "commands", _COUNT),
    (1, 0x028): ("Logical Sectors Read", "data-read", _SECTORS, _COUNT),
    (1, 0x030): ("Number of Read Commands", "read-commands", "commands", _COUNT),
    (3, 0x010): ("Head Flying Hours", "head-flying-hours", "hours", _TIME),
    (3, 0x020): ("Number of Reallocated Logical Sectors", "reallocated-sectors", "sectors", _COUNT),
    (3, 0x028): ("Read Recovery Attempts", "read-recovery-attempts", "events", _COUNT),
    (3, 0x030): ("Number of Mechanical Start Failures", "start-failures", "events", _COUNT),
    (3, 0x038): ("Number of Realloc. Candidate Logical Sectors", "pending-sectors", "sectors", _GAUGE),
    (4, 0x008): ("Number of Reported Uncorrectable Errors", "reported-uncorrectable", "errors", _COUNT),
    (4, 0x010): ("Resets Between Cmd Acceptance and Completion", "command-resets", "events", _COUNT),
    (5, 0x008): ("Current Temperature", "temperature", "celsius", _GAUGE),
    (5, 0x020): ("Highest Temperature", "highest-temperature", "celsius", _GAUGE),
    (5, 0x028): ("Lowest Temperature", "lowest-temperature", "celsius", _GAUGE),
    (5, 0x050): ("Time in Over-Temperature", "over-temperature-minutes", "minutes", _COUNT),
    (6, 0x008): ("Number of Hardware Resets", "hardware-resets", "events", _COUNT),
    (6, 0x018): ("Number of Interface CRC Errors", "crc-errors", "errors", _COUNT),
    _PERCENTAGE: ("Percentage Used Endurance Indicator", "percentage-used", "percent", _WEAR),
}
"""By page and offset: the printed name, the signal, its unit and kind."""

SIGNALS = frozenset(meaning[1] for meaning in _MEANINGS.values())
"""Every signal that the log can state."""

_PLACES = {meaning[0]: place for place, meaning in _MEANINGS.items()} | {
    "Specified Maximum Operating Temperature": _MAXIMUM
}

_HEADLINE = re.compile(r"\s*Device Statistics \((?:GP|SMART) Log 0x04\)\s*")
_LACKING = re.compile(r"Device Statistics \(GP(?:/SMART)? Log 0x04\) not supported", re.IGNORECASE)
# Versions before 6.4 print no flags and mark a normalised value with "~" (memory).
_ROW = re.compile(
    r"\s*(?P<page>0x[0-9a-fA-F]{2}|[0-9]{1,2})\s+(?P<offset>0x[0-9a-fA-F]{3})\s+(?P<size>[1-8])\s+"
    r"(?P<value>-?[0-9]{1,20})(?P<old>~?)\s+(?:(?P<flags>[-NDCVS]{3,4})\s+)?(?P<name>[A-Z]\S.*?)\s*"
)


@dataclass(frozen=True, slots=True)
class _Field:
    """One valid field: where it stands, how many bytes it has, its value, and whether that is normalised."""

    place: tuple[int, int]
    size: int | None
    value: int
    normalised: bool


def told(document: Document | None, sheet: Sheet) -> bool:
    """Whether an answer holds the log, be it without a valid field."""
    if rows_at(document, "ata_device_statistics", "pages"):
        return True
    return any(_HEADLINE.fullmatch(line) for line in sheet.lines)


def lacking(sheet: Sheet) -> bool:
    """Whether an answer says that the drive has no such log."""
    return any(_LACKING.search(line) for line in sheet.lines)


def values(document: Document | None, sheet: Sheet, *, sector: int | None) -> tuple[Value, ...]:
    """The signals in the log, one each.

    Args:
        document: smartctl's document, or None; where it has the log, that holds.
        sheet: the plain text.
        sector: bytes in a logical sector, or None.
    """
    found: dict[str, Value] = {}
    for field in _fields(document, sheet):
        meaning = _MEANINGS.get(field.place)
        # A normalised value is no count; the one that is meant to be a share says so or not.
        if meaning is not None and (not field.normalised or field.place == _PERCENTAGE):
            _, signal, unit, kind = meaning
            found.setdefault(signal, _value(field, signal, unit, kind, sector))
    return tuple(found.values())


def maximum_celsius(document: Document | None, sheet: Sheet) -> int | None:
    """The greatest temperature that the drive is made for, by its own word; None where it states none."""
    for field in _fields(document, sheet):
        if field.place == _MAXIMUM:
            return field.value if _LEAST_LIMIT <= field.value <= packing.HOTTEST else None
    return None


def _value(field: _Field, signal: str, unit: str, kind: SignalKind, sector: int | None) -> Value:
    value: int | None = field.value
    reason = None
    if unit == "celsius":
        value, reason = packing.sane_celsius(field.value)
    elif field.size is not None and field.value == 256**field.size - 1:
        value, reason = None, packing.FULL
    elif unit == "hours":
        value, reason = packing.sane_hours(field.value)
    elif unit == _SECTORS:
        value = field.value * sector if sector is not None else None
        reason = None if sector is not None else _NO_SECTOR
    unit = "bytes" if unit == _SECTORS else unit
    return Value(signal=signal, value=value, unit=unit, kind=kind, source=SOURCE, reason=reason)


def _fields(document: Document | None, sheet: Sheet) -> Iterator[_Field]:
    pages = rows_at(document, "ata_device_statistics", "pages")
    yield from _from_document(pages) if pages else _from_rows(sheet)


def _from_document(pages: tuple[Document, ...]) -> Iterator[_Field]:
    for page in pages:
        number = number_at(page, "number")
        for row in rows_at(page, "table"):
            offset, value = number_at(row, "offset"), number_at(row, "value")
            place = (
                (number, offset)
                if number is not None and offset is not None
                else _PLACES.get(text_at(row, "name") or "")
            )
            if place is not None and value is not None and flag_at(row, "flags", "valid") is True:
                normalised = flag_at(row, "flags", "normalized") is True
                yield _Field(place, natural_at(row, "size", most=8), value, normalised)


def _from_rows(sheet: Sheet) -> Iterator[_Field]:
    inside = False
    for line in sheet.lines:
        if _HEADLINE.fullmatch(line):
            inside = True
        elif not line.strip():
            inside = False
        row = _ROW.fullmatch(line) if inside else None
        if row is None:
            continue
        page = hexadecimal(row["page"]) if row["page"].startswith("0x") else int(row["page"])
        offset = hexadecimal(row["offset"])
        if page is not None and offset is not None:
            normalised = row["old"] == "~" or (row["flags"] or "").startswith("N")
            yield _Field((page, offset), int(row["size"]), int(row["value"]), normalised)
