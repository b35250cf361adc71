"""The NVMe error information log, page 01h: errors of the medium told from commands that were refused.

Every optional command that a host tries and the drive does not know adds an entry, so that their total rises by
thousands on drives without a fault. Only an entry whose status code type is 2h, media and data integrity errors
(NVM Express Base Specification, status field), speaks of the medium.
"""

import re
from collections.abc import Iterator

from diskwatch.machine.document import Document, number_at, rows_at
from diskwatch.machine.text import Sheet
from diskwatch.records import SignalKind, Value

_UNREAD = "an entry of the log could not be read"
_HEADLINE = "error information (nvme log 0x01"
_NO_ROWS = ("Num ", "No Errors Logged", "Read ", "...")
"""How lines begin that are no rows: the head, an empty log, a failure, how many are left out."""

_MEDIUM = 2
# Number, error count, queue, command, status, location, block, and what may stand behind.
_ROW = re.compile(
    r"\s*[0-9]{1,4}\s+(?P<count>[0-9]{1,20})\s+(?:[0-9]{1,5}|-)\s+(?:0x[0-9a-fA-F]{4}|-)\s+"
    r"0x(?P<status>[0-9a-fA-F]{4})\s+\S+\s+\S+(?:\s+\S.*)?"
)


def media_entries(document: Document | None, sheet: Sheet) -> Value | None:
    """How many of the entries that the drive still keeps speak of the medium; None where it shows no log.

    The log holds the newest entries only, so the number falls when others push them out.

    Args:
        document: smartctl's document, or None; where it has the log, that holds.
        sheet: the plain text.
    """
    rows = rows_at(document, "nvme_error_information_log", "table")
    kinds = list(_from_document(rows) if rows else _from_rows(sheet))
    if not kinds and not _shown_empty(document, sheet):
        return None
    unread = None in kinds
    return Value(
        signal="media-error-entries",
        value=None if unread else sum(kind == _MEDIUM for kind in kinds),
        unit="events",
        kind=SignalKind.GAUGE,
        source="NVMe log 01h",
        reason=_UNREAD if unread else None,
    )


def _shown_empty(document: Document | None, sheet: Sheet) -> bool:
    if number_at(document, "nvme_error_information_log", "read") is not None:
        return True
    lines = iter(sheet.lines)
    return any(_HEADLINE in line.lower() for line in lines) and "No Errors Logged" in next(lines, "")


def _from_document(rows: tuple[Document, ...]) -> Iterator[int | None]:
    """Status code types in a document of version 7.4 or later (keys from memory); None where none is stated."""
    for row in rows:
        kind = number_at(row, "status_field", "status_code_type")
        value = number_at(row, "status_field", "value")
        if kind is not None:
            yield kind
        else:
            yield value >> 8 & 0x7 if value is not None else None


def _from_rows(sheet: Sheet) -> Iterator[int | None]:
    """Status code types in the text; None for a row that cannot be read.

    What is printed is the status field as it stands in the log, with the phase tag in bit 0: the code type lies
    in bits 9 to 11 (NVM Express Base Specification, error information log entry, bytes 12 and 13).
    """
    inside = False
    for line in sheet.lines:
        if _HEADLINE in line.lower():
            inside = True
            continue
        if not line.strip():
            inside = False
        if not inside or line.startswith(_NO_ROWS):
            continue
        row = _ROW.fullmatch(line)
        if row is None:
            yield None
        elif int(row["count"]) > 0:
            yield int(row["status"], 16) >> 9 & 0x7
