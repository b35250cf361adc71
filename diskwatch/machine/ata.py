"""ATA drives: the attribute table, and the signals in it."""

import re
from collections.abc import Iterator, Sequence
from typing import Any

from diskwatch.machine import device_statistics, meanings, packing
from diskwatch.machine.document import Document, flag_at, natural_at, number_at, rows_at, text_at
from diskwatch.machine.meanings import AtaMeaning
from diskwatch.machine.text import Sheet, whole
from diskwatch.records import Attribute, Failing, SignalKind, Value

_ROW = re.compile(
    r"\s*(?P<number>[0-9]{1,3})\s+(?P<name>\S+)\s+(?P<flags>0x[0-9a-fA-F]{4}|[-POSRCK]{6}\+?)"
    r"\s+(?P<value>[0-9]{3}|---)\s+(?P<worst>[0-9]{3}|---)\s+(?P<threshold>[0-9]{3}|---)"
    r"(?:\s+(?P<type>Pre-fail|Old_age)\s+(?:Always|Offline))?\s+(?P<failing>-|\w+)\s+(?P<raw>\S.*)"
)
_FAILING = {"failing_now": Failing.NOW, "now": Failing.NOW, "in_the_past": Failing.PAST, "past": Failing.PAST}
_PREFAIL_FLAG = 0x0001

_LEAST_MOVED = 1_000_000
"""Bytes that a drive moves in one power cycle at the very least: even mounting it reads more (practice)."""


def attributes(document: Document | None, device: Any, sheet: Sheet) -> tuple[Attribute, ...]:
    """The attribute table in its own order.

    The document comes first, being exact, then pySMART, then our own reading of the rows: the library loses
    rows without a normalised value, and gives up altogether on some texts.
    """
    table: dict[int, Attribute] = {}
    for source in (_from_document(document), _from_library(device), _from_rows(sheet)):
        for row in source:
            table.setdefault(row.number, row)
    return tuple(table.values())


def values(
    rows: Sequence[Attribute],
    document: Document | None,
    sheet: Sheet,
    *,
    flash: bool,
    statistics_first: bool = True,
) -> tuple[Value, ...]:
    """The signals of an ATA drive, one each.

    Args:
        rows: its attribute table.
        document: smartctl's document, or None.
        sheet: the plain text.
        flash: whether it is a solid-state drive.
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
    cycles = found["power-cycles"].value if "power-cycles" in found else None
    least = _LEAST_MOVED * (cycles if isinstance(cycles, int) else 1)
    sector = _sector(document, sheet)
    more = (
        *_volumes(rows, sector, least=least if flash else 0),
        *_wear(rows, known_model=_in_table(document, sheet)),
        *_exact(document),
        *_error_log(document, sheet),
    )
    found.update({value.signal: value for value in more})
    for value in device_statistics.values(document, sheet, sector=sector):
        known = found.get(value.signal)
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
        yield Attribute(
            number=row.num,
            name=row.name,
            value=whole(row.value_str),
            worst=whole(str(row._worst)),  # noqa: SLF001 - its public form raises on "---"
            threshold=whole(str(row._thresh)),  # noqa: SLF001 - as above
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


def _in_table(document: Document | None, sheet: Sheet) -> bool:
    """Whether smartctl's own table knows the model, so that names and units are more than a default."""
    told = flag_at(document, "in_smartctl_database")
    return told if told is not None else (sheet.get("Device is") or "").lower().startswith("in ")


def _volumes(rows: Sequence[Attribute], sector: int | None, *, least: int) -> Iterator[Value]:
    """Data written and read, where the attribute's name states the unit.

    Many solid-state drives count in 32 MiB or GiB under a default name of smartctl that says blocks. Where
    blocks would add up to next to nothing, the unit is not known, for both directions.

    Args:
        rows: the attribute table.
        sector: bytes in a logical block, or None.
        least: bytes below which a count of blocks is not believed.
    """
    named: dict[str, tuple[Attribute, int | None]] = {}
    for number in meanings.VOLUME_NUMBERS:
        for row in rows:
            signal, step = meanings.VOLUMES.get(row.name.lower(), ("", None))
            if signal and row.number == number:
                named.setdefault(signal, (row, step))
    counted = {signal: packing.volume(row.raw) for signal, (row, _) in named.items()}
    doubtful = any(
        steps is not None and sector is not None and steps * sector < least
        for signal, (steps, _) in counted.items()
        if named[signal][1] is None
    )
    for signal, (row, step) in named.items():
        steps, reason = counted[signal]
        size = step if step is not None else sector
        if steps is not None and (size is None or (step is None and doubtful)):
            steps, reason = None, "the unit in which this drive counts is not known"
        yield Value(
            signal=signal,
            value=steps * size if steps is not None and size is not None else None,
            unit="bytes",
            kind=SignalKind.COUNT,
            source=f"attribute {row.number}",
            reason=reason,
        )


_SECTORS = frozenset({512, 520, 524, 528, 4_096, 4_104, 4_112, 4_160, 4_224})
"""Bytes that logical blocks have, with and without room for checks (practice)."""


def _sector(document: Document | None, sheet: Sheet) -> int | None:
    """Bytes in a logical block, where a size is stated that blocks have."""
    told = number_at(document, "logical_block_size")
    if told is None:
        found = re.match(r"([0-9]{3,6}) bytes logical", sheet.get("Sector Size", "Sector Sizes") or "")
        told = int(found[1]) if found is not None else None
    return told if told in _SECTORS else None


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
