"""SCSI background scan results, log page 15h: sectors that the drive itself found and could not yet replace.

Sources: SBC, background scan results log page; reassign status 1h, pending, from a maker's SCSI manual; the
words that smartctl prints for it from memory. Entries from 1 to 800h are results, others are the maker's own.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass

from diskwatch.machine.document import Document, dig, natural_at, number_at, text_at
from diskwatch.machine.text import Sheet
from diskwatch.records import SignalKind, Value

SOURCE = "SCSI background scan log"

_UNREAD = "a result of the scan could not be read"

_HEADLINE = "background scan results log"
_LAST = 0x800
_PENDING = re.compile(r"require write or reassign|reassignment pending", re.IGNORECASE)
_SETTLED = re.compile(
    r"^(?:no reassignment needed|success\w* |reassign\w* by|recovered via|reassignment (?:by|failed)|failed|"
    r"reassign status: reserved|unknown|reserved)",
    re.IGNORECASE,
)
"""How the other results begin; some of smartctl's wordings, the rest from memory."""

_ROW = re.compile(
    r"\s*(?P<number>[0-9]{1,5})\s+(?P<hours>[0-9]{1,8}):(?P<minutes>[0-9]{2})\s+(?P<lba>[0-9a-fA-F]{8,16})\s+"
    r"\[[0-9a-fA-F]{1,2},[0-9a-fA-F]{1,2},[0-9a-fA-F]{1,2}\]\s+(?P<status>\S.*)"
)


@dataclass(frozen=True, slots=True)
class _Found:
    """One result: which block, when (powered minutes), and whether it waits for a write."""

    lba: str
    minutes: int
    pending: bool


def told(document: Document | None, sheet: Sheet) -> bool:
    """Whether an answer holds the log's status, with or without results."""
    return dig(document, "scsi_background_scan") is not None or (
        sheet.holds(_HEADLINE) and sheet.holds("Number of background scans performed")
    )


def lacking(sheet: Sheet) -> bool:
    """Whether an answer says that the drive keeps no such log."""
    return sheet.holds("does not support Background scan results logging")


def hinted(sheet: Sheet) -> bool:
    """Whether an answer without the log holds a figure that stands in that log: powered time in minutes."""
    return any(
        re.search(r"power on time, hours:minutes [0-9]+:[0-9]{2} \[[0-9]+ minutes\]", line)
        for line in sheet.lines
    )


def pending(document: Document | None, sheet: Sheet) -> Value | None:
    """How many sectors wait to be written or reassigned; None where the drive was not asked or keeps no log.

    What was found later about a block holds: blocks that were rewritten since count no more.
    """
    if not told(document, sheet):
        return None
    rows = list(_from_rows(sheet)) or list(_from_document(document))
    sound = tuple(row for row in rows if row is not None)
    newest: dict[str, _Found] = {}
    for row in sound:
        if row.lba not in newest or row.minutes >= newest[row.lba].minutes:
            newest[row.lba] = row
    unread = len(sound) < len(rows)  # any of which may wait, or tell that another one no longer does
    return Value(
        signal="pending-sectors",
        value=None if unread else sum(row.pending for row in newest.values()),
        unit="sectors",
        kind=SignalKind.GAUGE,
        source=SOURCE,
        reason=_UNREAD if unread else None,
    )


def _from_rows(sheet: Sheet) -> Iterator[_Found | None]:
    """Results in the text, from the table's head to its end; None for one that cannot be read."""
    inside = below = False
    for line in sheet.lines:
        if _HEADLINE in line.lower():
            inside = True
        elif inside and "reassign_status" in line:
            below = True
        elif not line.strip():
            below = False
        row = _ROW.fullmatch(line) if inside else None
        if row is None:
            if below and "reassign_status" not in line:
                yield None
        elif 0 < int(row["number"]) <= _LAST:
            minutes = int(row["hours"]) * 60 + int(row["minutes"])
            lba = row["lba"].lower().lstrip("0")
            yield _found(lba, minutes, row["status"])


def _found(lba: str, minutes: int, status: str) -> _Found | None:
    waits = _PENDING.search(status) is not None
    return _Found(lba, minutes, waits) if waits or _SETTLED.search(status) is not None else None


def _from_document(document: Document | None) -> Iterator[_Found | None]:
    """Results in a document without its text (keys from the program, what lies below them from memory)."""
    scan = dig(document, "scsi_background_scan")
    for number in range(1, _LAST + 1):
        row = dig(scan, f"result_{number}")
        if row is None:
            return
        status, lba = text_at(row, "reassign_status"), natural_at(row, "lba")
        if lba is None:
            lba = natural_at(row, "lba", "value")
        hours, minutes = (number_at(row, "accumulated_power_on", key) for key in ("hours", "minutes"))
        if status is None or lba is None or hours is None:
            yield None
        else:
            yield _found(f"{lba:x}", hours * 60 + (minutes or 0), status)
