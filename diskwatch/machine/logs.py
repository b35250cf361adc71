"""NVMe and SCSI drives: the signals in their log pages."""

import re
from collections.abc import Iterator
from decimal import Decimal
from typing import Any

from diskwatch.machine import background_scan, meanings
from diskwatch.machine.document import Document, dig, number_at, text_at
from diskwatch.machine.meanings import LogMeaning
from diskwatch.machine.packing import FULL, HOTTEST, sane_celsius
from diskwatch.machine.text import Sheet, hexadecimal, whole
from diskwatch.records import SignalKind, Value

_UNREADABLE = "what stands there is no number"
_SILENT = "the drive states 0, which stands for not reported"
_NOTHING = "the drive states no temperature"
_HEALTH = "NVMe log 02h"
_MOST_SENSORS = 8
_COUNTER_FULL = 2**32 - 1


def nvme_values(document: Document | None, sheet: Sheet) -> tuple[Value, ...]:
    """The signals of an NVMe drive's health log."""
    return (*_logged(meanings.NVME, document, sheet, _HEALTH), *_sensors(document, sheet))


def _sensors(document: Document | None, sheet: Sheet) -> Iterator[Value]:
    """The drive's temperature sensors, those that it has; where they sit is the maker's matter."""
    listed = dig(document, "nvme_smart_health_information_log", "temperature_sensors")
    for number in range(1, _MOST_SENSORS + 1):
        stated = listed[number - 1] if isinstance(listed, list) and number <= len(listed) else None
        celsius: int | None = stated if isinstance(stated, int) and not isinstance(stated, bool) else None
        printed = sheet.get(f"Temperature Sensor {number}")
        if celsius is None:
            if printed is None:
                continue
            celsius = _printed(printed)
        value, reason = (None, _UNREADABLE) if celsius is None else sane_celsius(celsius)
        yield Value(
            signal=f"temperature-sensor-{number}",
            value=value,
            unit="celsius",
            kind=SignalKind.GAUGE,
            source=_HEALTH,
            reason=reason,
        )


def scsi_values(document: Document | None, device: Any, sheet: Sheet) -> tuple[Value, ...]:
    """The signals of a SCSI drive's log pages.

    Args:
        document: smartctl's document, or None.
        device: pySMART's reading, or None; it has the error counters of rows set out as it knows them.
        sheet: the plain text.
    """
    found = {value.signal: value for value in _logged(meanings.SCSI, document, sheet, "SCSI log")}
    heat = found.get("temperature")
    if heat is not None and heat.value == 0 and not _trip(document, sheet):
        # A controller that invents a disk answers 0 for both; a real drive has a limit of its own.
        found["temperature"] = Value(
            signal="temperature",
            value=None,
            unit="celsius",
            kind=SignalKind.GAUGE,
            source=heat.source,
            reason=_NOTHING,
        )
    for value in (*_error_counters(document, device, sheet), *_hours(document, sheet)):
        found[value.signal] = value
    pending = background_scan.pending(document, sheet)
    if pending is not None:
        found.setdefault(pending.signal, pending)  # the list of pending defects is complete, the scan's is not
    return tuple(found.values())


def _trip(document: Document | None, sheet: Sheet) -> int | None:
    told = number_at(document, "temperature", "drive_trip")
    if told is None:
        told = number_at(document, "scsi_temperature", "drive_trip")
    return told if told is not None else whole(sheet.get("Drive Trip Temperature") or "")


def trip_celsius(document: Document | None, sheet: Sheet) -> int | None:
    """The temperature at which a SCSI drive calls itself too hot; 0 and FFh stand for none."""
    told = _trip(document, sheet)
    return told if told is not None and 0 < told <= HOTTEST else None


def nvme_limits(document: Document | None, sheet: Sheet) -> tuple[int | None, int | None]:
    """An NVMe drive's own limits, warning and critical; 0 stands for none."""
    limits: list[int | None] = []
    for key in ("warning", "critical"):
        told = number_at(document, "nvme_composite_temperature_threshold", key)  # the key is from memory
        if told is None:
            told = whole(sheet.get(f"{key} Comp. Temp. Threshold") or "")
        limits.append(told if told is not None and 0 < told <= HOTTEST else None)
    return limits[0], limits[1]


def _logged(
    table: tuple[LogMeaning, ...], document: Document | None, sheet: Sheet, source: str
) -> Iterator[Value]:
    for meaning in table:
        number = number_at(document, *meaning.path) if meaning.path else None
        if number is None:
            printed = sheet.get(*meaning.labels)
            if printed is None:
                continue
            number = _printed(printed)
        value, reason = _judged(meaning, number)
        yield Value(
            signal=meaning.signal,
            value=value,
            unit=meaning.unit,
            kind=meaning.kind,
            source=source,
            reason=reason,
        )


def _printed(text: str) -> int | None:
    """A field's number as printed: decimal, hexadecimal, below zero, or with words behind it."""
    below = re.fullmatch(r"-([0-9]{1,3})\s*(?:C|Celsius)", text)
    if below is not None:
        return -int(below[1])
    number = whole(text)
    if number is None:
        number = hexadecimal(text)
    if number is None:
        worded = re.fullmatch(r"([0-9]{1,10}) Pending Defects?(?:[,:].*)?", text)
        number = int(worded[1]) if worded is not None else None
    return number


def _judged(meaning: LogMeaning, number: int | None) -> tuple[int | None, str | None]:
    if number is None:
        return None, _UNREADABLE
    if number == meaning.most:
        return None, FULL if meaning.unit != "celsius" else _NOTHING
    if number == 0 and meaning.zero_unknown:
        return None, _SILENT
    if meaning.unit == "celsius":
        return sane_celsius(number)
    return number * meaning.step, None


_ROW = re.compile(
    r"\s*(?P<what>read|write|verify):\s+(?:[0-9]{1,20}\s+){5}"
    r"(?P<moved>[0-9]{1,20}[.,][0-9]{3})\s+(?P<bad>[0-9]{1,20})"
)
_ROW_BEGUN = re.compile(r"\s*(read|write|verify):\s")
_UNCORRECTED = {"read": "uncorrected-reads", "write": "uncorrected-writes", "verify": "uncorrected-verifies"}
_MOVED = {"read": "data-read", "write": "data-written"}


def _error_counters(document: Document | None, device: Any, sheet: Sheet) -> Iterator[Value]:
    """Errors that the drive could not correct and data moved; only these compare between makers."""
    rows = {found["what"]: found for line in sheet.lines if (found := _ROW.fullmatch(line)) is not None}
    # The library takes whatever stands at a place for what should stand there.
    strange = {found[1] for line in sheet.lines if (found := _ROW_BEGUN.match(line)) is not None} - rows.keys()
    diagnostics = getattr(device, "diagnostics", None)
    library = {"read": "Uncorrected_Reads", "write": "Uncorrected_Writes", "verify": "Uncorrected_Verifies"}
    for what, signal in _UNCORRECTED.items():
        page = dig(document, "scsi_error_counter_log", what)
        bad = number_at(page, "total_uncorrected_errors")
        if bad is None:
            told = getattr(diagnostics, library[what], None) if what not in strange else None
            bad = int(rows[what]["bad"]) if what in rows else (told if isinstance(told, int) else None)
        if bad is not None or what in strange:
            full = bad == _COUNTER_FULL
            yield Value(
                signal=signal,
                value=None if full else bad,
                unit="errors",
                kind=SignalKind.COUNT,
                source=f"SCSI {what} error log",
                reason=FULL if full else _UNREADABLE if bad is None else None,
            )
        printed = text_at(page, "gigabytes_processed") or (rows[what]["moved"] if what in rows else None)
        if what in _MOVED and printed is not None and re.fullmatch(r"[0-9]{1,20}[.,][0-9]{3}", printed):
            # Printed in units of 10^9 bytes with three decimals; decimal arithmetic keeps them exact.
            moved = int(Decimal(printed.replace(",", ".")) * 10**9)
            yield Value(
                signal=_MOVED[what],
                value=moved,
                unit="bytes",
                kind=SignalKind.COUNT,
                source=f"SCSI {what} error log",
            )


def _hours(document: Document | None, sheet: Sheet) -> Iterator[Value]:
    """Powered hours: from the background scan log, or from the page that two makers keep."""
    hours = number_at(document, "power_on_time", "hours")
    if hours is None:
        for line in sheet.lines:
            found = re.search(
                r"power on time, hours:minutes\s+([0-9]{1,7}):[0-9]{2}\b"
                r"|hours powered up = ([0-9]{1,7})\.[0-9]{2}\b",
                line,
            )
            if found is not None:
                hours = int(found[1] or found[2])
                break
    if hours is not None:
        yield Value(signal="power-on-hours", value=hours, unit="hours", kind=SignalKind.TIME, source="SCSI log")
