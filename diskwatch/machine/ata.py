"""ATA drives: the attribute table, and the signals in it."""

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Any

from diskwatch.machine import device_statistics, meanings, packing, rates
from diskwatch.machine.document import Document, flag_at, natural_at, number_at, rows_at, text_at
from diskwatch.machine.meanings import AtaMeaning
from diskwatch.machine.text import Sheet, whole
from diskwatch.machine.volumes import sector_of, volumes
from diskwatch.records import Attribute, Failing, SignalKind, Value

_ROW = re.compile(
    r"\s*(?P<number>[0-9]{1,3})\s+(?P<name>\S+)\s+(?P<flags>0x[0-9a-fA-F]{4}|[-POSRCK]{6}\+?)"
    r"\s+(?P<value>[0-9]{3}|---)\s+(?P<worst>[0-9]{3}|---)\s+(?P<threshold>[0-9]{3}|---)"
    r"(?:\s+(?P<type>Pre-fail|Old_age)\s+(?:Always|Offline))?\s+(?P<failing>-|\w+)\s+(?P<raw>\S.*)"
)
_DISPUTED = frozenset({"reallocated-sectors", "pending-sectors", "reported-uncorrectable", "crc-errors"})

_LEVEL = re.compile(r"[0-9]{3}|---")

_FAILING = {"failing_now": Failing.NOW, "now": Failing.NOW, "in_the_past": Failing.PAST, "past": Failing.PAST}
_PREFAIL_FLAG = 0x0001


def attributes(document: Document | None, device: Any, sheet: Sheet) -> tuple[Attribute, ...]:
    """The attribute table in its own order.

    The document comes first, being exact, then our own reading of the rows, then pySMART: the library loses
    rows without a normalised value, gives up altogether on some texts, and shifts the columns of a broken row.
    """
    table: dict[int, Attribute] = {}
    for source in (_from_document(document), _from_rows(sheet), _from_library(device)):
        for row in source:
            table.setdefault(row.number, row)
    return tuple(table.values())


def values(
    rows: Sequence[Attribute],
    document: Document | None,
    sheet: Sheet,
    *,
    flash: bool,
    model: str | None = None,
    statistics_first: bool = True,
) -> tuple[Value, ...]:
    """The signals of an ATA drive, one each.

    Args:
        rows: its attribute table.
        document: smartctl's document, or None.
        sheet: the plain text.
        flash: whether it is a solid-state drive.
        model: the drive's, or None.
        statistics_first: whether Device Statistics hold where the table states the same signal; if not they
            only fill in what the table leaves open.
    """
    found: dict[str, Value] = {}
    for meaning in (*meanings.ATA, *(() if flash else (meanings.RETRACTS,))):
        for row in _meant(rows, meaning):
            value = _value(meaning, row)
            known = found.get(meaning.signal)
            if known is None or (known.value is None and value.value is not None):
                found[meaning.signal] = value
    hours = found["power-on-hours"].value if "power-on-hours" in found else None
    sector = sector_of(document, sheet)
    more = (
        *_beside(rows, found),
        *rates.rates(rows, model),
        *volumes(rows, sector=sector, flash=flash, hours=hours if isinstance(hours, int) else None),
        *_wear(rows, known_model=_in_table(document, sheet)),
        *_exact(document),
        *_error_log(document, sheet),
    )
    found.update({value.signal: value for value in more})
    for value in device_statistics.values(document, sheet, sector=sector):
        known = found.get(value.signal)
        if known is not None and known.value and statistics_first and _disputed(value, known):
            signal = f"{value.signal}-by-attribute"
            found[signal] = replace(known, signal=signal)
        if known is None or known.value is None or (statistics_first and value.value is not None):
            found[value.signal] = value
    return tuple(found.values())


def _from_document(document: Document | None) -> Iterator[Attribute]:
    for row in rows_at(document, "ata_smart_attributes", "table"):
        number, name = number_at(row, "id"), text_at(row, "name")
        whole_raw = number_at(row, "raw", "value")
        raw = text_at(row, "raw", "string") or (str(whole_raw) if whole_raw is not None else None)
        if number is None or not 0 < number < 256 or name is None or raw is None:
            continue
        yield Attribute(
            number=number,
            name=name,
            value=natural_at(row, "value", most=255),
            worst=natural_at(row, "worst", most=255),
            threshold=natural_at(row, "thresh", most=255),
            prefail=flag_at(row, "flags", "prefailure") is True,
            raw=raw.strip(),
            failing=_FAILING.get((text_at(row, "when_failed") or "").lower()),
        )


def _from_library(device: Any) -> Iterator[Attribute]:
    for row in getattr(device, "attributes", None) or ():
        if row is None or not 0 < row.num < 256:
            continue
        # Its public forms of the last two raise on "---".
        levels = [str(level) for level in (row.value_str, row._worst, row._thresh)]  # noqa: SLF001 - as above
        if any(_LEVEL.fullmatch(level) is None for level in levels):
            continue
        value, worst, threshold = (whole(level) for level in levels)
        yield Attribute(
            number=row.num,
            name=row.name,
            value=value,
            worst=worst,
            threshold=threshold,
            prefail=row.type == "Pre-fail",
            raw=row.raw.strip(),
            failing=_FAILING.get(row.when_failed.lower()),
        )


def _from_rows(sheet: Sheet) -> Iterator[Attribute]:
    for line in sheet.lines:
        found = _ROW.fullmatch(line)
        if found is None or not 0 < int(found["number"]) < 256:
            continue
        flags = found["flags"]
        yield Attribute(
            number=int(found["number"]),
            name=found["name"],
            value=whole(found["value"]),
            worst=whole(found["worst"]),
            threshold=whole(found["threshold"]),
            prefail=bool(int(flags, 16) & _PREFAIL_FLAG) if flags.startswith("0x") else flags.startswith("P"),
            raw=found["raw"],
            failing=_FAILING.get(found["failing"].lower()),
        )


def _meant(rows: Sequence[Attribute], meaning: AtaMeaning) -> Iterator[Attribute]:
    for number in meaning.numbers:
        for row in rows:
            if row.number == number and meaning.name.search(row.name) is not None:
                yield row


def _value(meaning: AtaMeaning, row: Attribute) -> Value:
    value, reason = meaning.decode(row.raw)
    return Value(
        signal=meaning.signal,
        value=value,
        unit=meaning.unit,
        kind=meaning.kind,
        source=f"attribute {row.number}",
        reason=reason,
    )


def _disputed(logged: Value, known: Value) -> bool:
    """Whether log 04h states no error where the table states some: then both are told."""
    return logged.value == 0 and logged.signal in _DISPUTED and logged.unit == known.unit


def _beside(rows: Sequence[Attribute], found: Mapping[str, Value]) -> Iterator[Value]:
    """What stands beside the main value of a field, and raw values that are packed in an unknown way."""
    for meaning in meanings.PARTS:
        for row in _meant(rows, meaning):
            part = _value(meaning, row)
            if part.value is not None:
                yield part
                break
    for meaning in meanings.ATA:
        value = found.get(meaning.signal)
        if value is not None and value.reason == packing.PACKED:
            for row in _meant(rows, meaning):
                if value.source == f"attribute {row.number}":
                    yield from rates.opaque(row, meaning.signal)


def _in_table(document: Document | None, sheet: Sheet) -> bool:
    """Whether smartctl's own table knows the model, so that names and units are more than a default."""
    told = flag_at(document, "in_smartctl_database")
    return told if told is not None else (sheet.get("Device is") or "").lower().startswith("in ")


def _wear(rows: Sequence[Attribute], *, known_model: bool) -> Iterator[Value]:
    """Share of rated life used up and of spare blocks left, where names are sure to say so."""
    sure = [row for row in rows if known_model or row.name.lower() not in meanings.DEFAULT_NAMES]
    used: dict[str, Value] = {}
    for row in sure:
        if meanings.USED_BY_NAME.search(row.name) is not None:
            share = whole(row.raw)
            if share is not None and share <= 255:
                used.setdefault("percentage-used", _percent("percentage-used", share, row))
        elif row.value is None or not 0 < row.value <= 100:
            continue
        elif meanings.LEFT_BY_NAME.search(row.name) is not None:
            used.setdefault("percentage-used", _percent("percentage-used", 100 - row.value, row))
        elif meanings.SPARE_BY_NAME.search(row.name) is not None and known_model:
            used.setdefault("available-spare", _percent("available-spare", row.value, row))
    yield from used.values()


def _percent(signal: str, share: int, row: Attribute) -> Value:
    return Value(
        signal=signal,
        value=share,
        unit="percent",
        kind=SignalKind.WEAR,
        source=f"attribute {row.number}",
    )


_STATED: tuple[tuple[tuple[str, ...], str, str, SignalKind], ...] = (
    (("temperature", "current"), "temperature", "celsius", SignalKind.GAUGE),
    (("power_on_time", "hours"), "power-on-hours", "hours", SignalKind.TIME),
    # The last three are keys of versions after 7.3 (memory).
    (("endurance_used", "current_percent"), "percentage-used", "percent", SignalKind.WEAR),
    (("spare_available", "current_percent"), "available-spare", "percent", SignalKind.WEAR),
    (("spare_available", "threshold_percent"), "spare-threshold", "percent", SignalKind.GAUGE),
)
"""What the document states outside the table, worked out by smartctl with what it knows of the model."""

_SANE = {"celsius": packing.sane_celsius, "hours": packing.sane_hours}


def _exact(document: Document | None) -> Iterator[Value]:
    """What the document states outside the table."""
    for path, signal, unit, kind in _STATED:
        number = number_at(document, *path)
        if number is not None:
            value, reason = _SANE[unit](number) if unit in _SANE else (number, None)
            yield Value(signal=signal, value=value, unit=unit, kind=kind, source="smartctl", reason=reason)


def _error_log(document: Document | None, sheet: Sheet) -> Iterator[Value]:
    """How many errors the drive's own log counts over its life; refused commands are among them."""
    counted = number_at(document, "ata_smart_error_log", "summary", "count")
    reason = None
    if counted is None:
        told = sheet.get("ATA Error Count")
        found = re.match(r"([0-9]{1,9})(?:\s*$|\s+\(device log contains)", told or "")
        if found is not None:
            counted = int(found[1])
        elif told is not None:
            reason = "the drive's error log is not sound"
        elif sheet.holds("No Errors Logged"):
            counted = 0
        else:
            return
    yield Value(
        signal="error-log-entries",
        value=counted,
        unit="events",
        kind=SignalKind.COUNT,
        source="log 01h",
        reason=reason,
    )
