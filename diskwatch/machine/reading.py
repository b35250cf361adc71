"""One answer of smartctl understood: the drive, its reading, and whether it has SMART at all."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from enum import Enum, auto

from diskwatch.machine import ata, logs, nvme_errors, packing, sct
from diskwatch.machine.assessment import assessment
from diskwatch.machine.document import Document, dig, flag_at, in_shape
from diskwatch.machine.held import Family, device_of
from diskwatch.machine.selftests import newest_result, self_tests
from diskwatch.machine.text import Sheet, is_of_smartctl
from diskwatch.machine.told import drive_of, family_of, is_flash
from diskwatch.records import Drive, Reading, SignalKind, Value
from diskwatch.units import plain


class Support(Enum):
    """What a drive says of its own SMART."""

    ON = auto()
    OFF = auto()
    NONE = auto()
    UNSAID = auto()


@dataclass(frozen=True, slots=True, kw_only=True)
class Understood:
    """What an answer says.

    Attributes:
        family: which language it speaks.
        drive: the drive as it describes itself, or None.
        reading: what it states of its state; may hold nothing.
        support: what it says of its SMART.
        genuine: whether it is written as smartctl writes: the version is named, the document in shape.
    """

    family: Family
    drive: Drive | None
    reading: Reading
    support: Support
    genuine: bool

    @property
    def says_something(self) -> bool:
        """Whether it speaks of a drive's state, which takes more than one number that belongs to nobody."""
        known = [value.signal for value in self.reading.values if value.value is not None]
        spoken = "self-assessment" in known or "drive-warning" in known
        return len(known) > 1 or (bool(known) and self.drive is not None) or spoken


def understood(
    lines: Sequence[str],
    document: Document | None,
    *,
    type_: str | None,
    path: str,
    statistics_first: bool = True,
) -> Understood:
    """Understand one answer.

    Args:
        lines: the plain text of ``smartctl --all``.
        document: its JSON document, or None; where it states something, that holds.
        type_: the device type that was asked with, or None.
        path: where the drive answered, for its identity.
        statistics_first: whether an ATA drive's Device Statistics hold before its attribute table.
    """
    sheet = Sheet.of(lines)
    family = family_of(document, sheet, type_)
    device = device_of(sheet.lines, family)
    drive = drive_of(family, document, sheet, path)
    tests = self_tests(family, document, device, sheet)
    rows = ata.attributes(document, device, sheet) if family is Family.ATA else ()
    warning: int | None = None
    critical: int | None = None
    if family is Family.ATA:
        values = ata.values(
            rows,
            document,
            sheet,
            flash=is_flash(drive),
            model=drive.identity.model if drive is not None else None,
            statistics_first=statistics_first,
        )
        warning, critical = sct.limits(document, sheet)
    elif family is Family.NVME:
        media = nvme_errors.media_entries(document, sheet)
        values = (*logs.nvme_values(document, sheet), *([media] if media is not None else []))
        warning, critical = logs.nvme_limits(document, sheet)
    else:
        values = logs.scsi_values(document, device, sheet)
        critical = logs.trip_celsius(document, sheet)
    newest = newest_result(tests)
    words = (
        *assessment(family, document, sheet),
        *(_newest(newest) if newest else ()),
    )
    return Understood(
        family=family,
        drive=drive,
        reading=Reading(
            values=(*(_possible(value) for value in values), *words),
            attributes=rows,
            self_tests=tests,
            warning_celsius=warning,
            critical_celsius=critical,
        ),
        support=_support(document, sheet),
        genuine=_genuine(document, sheet),
    )


def _newest(result: str) -> Iterator[Value]:
    yield Value(
        signal="self-test", value=plain(result), unit="word", kind=SignalKind.WORD, source="self-test log"
    )


def _genuine(document: Document | None, sheet: Sheet) -> bool:
    signed = any(map(is_of_smartctl, sheet.lines)) or dig(document, "smartctl", "version") is not None
    return signed and (document is None or in_shape(document))


def _possible(value: Value) -> Value:
    """A value, without its number where that cannot be true: a broken tool's document may hold any."""
    if not isinstance(value.value, int):
        return value
    _, reason = packing.sane(value.value, value.unit, value.signal)
    return value if reason is None else replace(value, value=None, reason=reason)


def _support(document: Document | None, sheet: Sheet) -> Support:
    said = " ".join(sheet.all("SMART support is")).lower()
    available = flag_at(document, "smart_support", "available")
    enabled = flag_at(document, "smart_support", "enabled")
    if available is False or "unavailable" in said or sheet.holds("does not support SMART"):
        return Support.NONE
    if enabled is False or "disabled" in said or sheet.holds("supports SMART and is Disabled"):
        return Support.OFF
    if enabled or "enabled" in said or sheet.holds("supports SMART and is Enabled"):
        return Support.ON
    return Support.UNSAID
