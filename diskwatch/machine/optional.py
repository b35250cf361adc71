"""Logs beyond the usual answer: which to ask a drive for, in the same one question, and which never again.

smartctl counts a log that the drive lacks as a failure, and some drives take long for it; so each is asked for
only where the drive, or what the kernel keeps of its IDENTIFY data, says that it has it, and what came of it is
remembered while the device stays. Through a USB adapter none is asked for: many do not carry such commands, and
some hang on them (practice).

A counter must not change its source in midstream: two sources seldom agree, and the difference would look like
a rise. So log 04h holds before the attribute table only where the first reading had it, and where it fails
later, its signals are not known for that time.
"""

import re
from dataclasses import dataclass, replace

from diskwatch.machine import background_scan, device_statistics, sct
from diskwatch.machine.document import Document, dig, flag_at, text_at
from diskwatch.machine.held import Family
from diskwatch.machine.protocol import Found
from diskwatch.machine.reading import Understood
from diskwatch.machine.text import Sheet
from diskwatch.records import Kind, Reading, Value
from diskwatch.units import DAY

STATISTICS, TEMPERATURE, BACKGROUND = "devstat", "scttempsts", "background"
"""What smartctl calls the three behind ``-l``."""

_PATIENCE = 2
"""Passes for which a log 04h that the kernel foretells may be silent at first; then the table is taken."""

_SILENT = "the drive's log 04h did not answer this time"
_ACS_2 = re.compile(r"\bACS-[2-9]\b")


@dataclass(frozen=True, slots=True)
class _Drive:
    """What is known of one drive's logs.

    Attributes:
        instance: which device it is about.
        has: by log, whether the drive has it; not there while that is not known.
        seen: the logs that answered at least once.
        first: whether the first reading had log 04h; None before it, and while a foretold log is still silent.
        waited: passes for which it was silent.
        stated: signals that came from log 04h so far.
        heat_at: when its SCT status was asked for, UTC seconds since 1970.
        limits: the temperature limits that it stated last, warning and critical.
    """

    instance: str
    has: dict[str, bool]
    seen: frozenset[str] = frozenset()
    first: bool | None = None
    waited: int = 0
    stated: frozenset[str] = frozenset()
    heat_at: int | None = None
    limits: tuple[int | None, int | None] = (None, None)


class OptionalLogs:
    """Remembers, drive by drive, which logs to ask for."""

    def __init__(self) -> None:
        self._drives: dict[str, _Drive] = {}

    def wanted(self, found: Found, at: int) -> tuple[str, ...]:
        """What to name behind ``-l`` in the next question; SCT status at most once a day.

        The day is counted anew after a start of the watch: what is remembered here ends with it. A drive is
        then asked for its SCT status once more, but never in the first round, which only learns that it has it.

        Args:
            found: the drive.
            at: when, UTC seconds since 1970.
        """
        if found.drive.kind is Kind.USB:
            return ()
        drive = self._drive(found)
        due = drive.heat_at is None or not 0 <= at - drive.heat_at < DAY
        return tuple(log for log, has in drive.has.items() if has and (due or log != TEMPERATURE))

    def statistics_first(self, found: Found) -> bool:
        """Whether log 04h holds before the attribute table."""
        return self._drive(found).first is not False

    def learn(
        self,
        found: Found,
        asked: tuple[str, ...],
        what: Understood,
        lines: tuple[str, ...],
        document: Document | None,
        *,
        at: int,
    ) -> Reading:
        """Take in a reading, and complete it with what holds from before.

        Args:
            found: the drive.
            asked: the logs that were asked for.
            what: what was understood of the answer.
            lines: its plain text.
            document: smartctl's document, or None.
            at: when, UTC seconds since 1970.
        """
        sheet, drive = Sheet.of(lines), self._drive(found)
        told, denied = _told(document, sheet), _denied(sheet)
        waits = drive.first is None and STATISTICS in set(asked) - told - denied and drive.waited < _PATIENCE
        seen = drive.seen | told
        # A log that never answered is lacking, whatever is said of it; one that did may fail once.
        lacking = set(asked) & (set(asked) - seen - ({STATISTICS} if waits else set()) | denied)
        has = {**_offered(what, sheet, document), **drive.has, **dict.fromkeys(lacking, False)}
        if TEMPERATURE not in has and (STATISTICS in told or not has.get(STATISTICS)):
            # The same limit in log 04h spares the drive the question.
            known = device_statistics.maximum_celsius(document, sheet) is not None
            model = what.drive.identity.model if what.drive is not None else None
            has[TEMPERATURE] = not known and sct.may_be_asked(document, sheet, model)
        first = drive.first
        if (first is None and not waits) or STATISTICS in denied:
            first = STATISTICS in told
        silent = waits or (drive.first is True and STATISTICS not in told | denied)
        unknown = (drive.stated or device_statistics.SIGNALS) if silent else frozenset()
        reading = _completed(what.reading, drive, unknown)
        stated = {value.signal for value in reading.values if value.source == device_statistics.SOURCE}
        self._drives[found.place.device] = _Drive(
            instance=found.instance,
            has=has if what.family is not Family.NVME else {},
            seen=seen,
            first=first,
            waited=drive.waited + waits,
            stated=drive.stated if silent else drive.stated | stated,
            heat_at=at if TEMPERATURE in asked else drive.heat_at,
            limits=(reading.warning_celsius, reading.critical_celsius),
        )
        return reading

    def _drive(self, found: Found) -> _Drive:
        drive = self._drives.get(found.place.device)
        if drive is not None and drive.instance == found.instance:
            return drive
        known = found.has_statistics
        return _Drive(found.instance, {} if known is None else {STATISTICS: known})


def _offered(what: Understood, sheet: Sheet, document: Document | None) -> dict[str, bool]:
    """Which logs the answer says that the drive has."""
    if what.family is Family.SCSI:
        return {BACKGROUND: background_scan.hinted(sheet)}
    version = text_at(document, "ata_version", "string") or sheet.get("ATA Version is") or ""
    logs = flag_at(document, "ata_smart_data", "capabilities", "gp_logging_supported")
    if logs is None:
        logs = sheet.holds("General Purpose Logging supported")
    # Device Statistics came with ACS-2.
    return {STATISTICS: logs and _ACS_2.search(version) is not None}


def _told(document: Document | None, sheet: Sheet) -> frozenset[str]:
    """Which logs the answer holds."""
    return frozenset(
        log
        for log, there in (
            (STATISTICS, device_statistics.told(document, sheet)),
            (TEMPERATURE, dig(document, "ata_sct_status") is not None or sheet.holds("SCT Status Version")),
            (BACKGROUND, background_scan.told(document, sheet)),
        )
        if there
    )


def _denied(sheet: Sheet) -> set[str]:
    """Which logs the answer says that the drive lacks."""
    return {
        log
        for log, lacking in (
            # Where the directory of logs could not be read, smartctl calls every log in it not supported.
            (STATISTICS, device_statistics.lacking(sheet) and not sheet.holds("Log Directory failed")),
            (BACKGROUND, background_scan.lacking(sheet)),
        )
        if lacking
    }


def _completed(reading: Reading, drive: _Drive, unknown: frozenset[str]) -> Reading:
    """A reading with the limits of before, and without values that would only stand in for a silent log 04h."""
    warning, critical = reading.warning_celsius, reading.critical_celsius
    return replace(
        reading,
        values=tuple(_unknown(value) if value.signal in unknown else value for value in reading.values),
        warning_celsius=drive.limits[0] if warning is None else warning,
        critical_celsius=drive.limits[1] if critical is None else critical,
    )


def _unknown(value: Value) -> Value:
    return replace(value, value=None, source=device_statistics.SOURCE, reason=_SILENT)
