"""Self-test logs: from the document where it holds them, else from rows of the text, else from pySMART.

The library drops or falsifies rows of NVMe drives whose codes are printed in another form than it knows; it is
taken where it understands more rows than are understood here.
"""

import re
from collections.abc import Iterable, Iterator
from typing import Any

from diskwatch.machine.document import Document, flag_at, natural_at, rows_at, text_at
from diskwatch.machine.held import Family
from diskwatch.machine.text import Sheet, whole
from diskwatch.records import SelfTest

_ATA_ROW = re.compile(
    r"#\s*[0-9]{1,2}\s+(?P<name>\S.*?)\s{2,}(?P<result>\S.*?)\s+[0-9]{1,3}%\s+(?P<hours>[0-9]{1,6})\s+(?P<lba>\S+)"
)
_NVME_ROW = re.compile(
    r"[0-9]{1,2}\s+(?P<name>\S.*?)\s{2,}(?P<result>\S.*?[a-zA-Z)\]?])\s+(?P<hours>-|[0-9]{1,12})\s+(?P<lba>\S+)"
    r"(?:\s+(?:-|(?:0x)?[0-9a-fA-F]{1,8})){3,4}"
)
_SCSI_ROW = re.compile(
    r"#\s*[0-9]{1,2}\s+(?P<name>\S.*?)\s{2,}(?P<result>\S.*?)\s+(?:-|[0-9]+)\s+(?P<hours>NOW|[0-9]{1,6})\s+(?P<lba>\S+)"
    r"\s+\[(?P<key>\S+)\s+\S+\s+\S+\]"
)
_ROWS = {Family.ATA: _ATA_ROW, Family.NVME: _NVME_ROW, Family.SCSI: _SCSI_ROW}

_RUNNING = ("progress", "running")
_NEITHER = ("abort", "interrupt", *_RUNNING, "incomplete", "unknown error")
_FAILED = ("fail", "fatal", "damage")
_FATAL = "fatal"  # ATA has one status for it and for "unknown", with which the test could not go on


def self_tests(family: Family, document: Document | None, device: Any, sheet: Sheet) -> tuple[SelfTest, ...]:
    """The self-test log, newest first; empty where the drive has none or says nothing of it.

    Args:
        family: which language the drive speaks.
        document: smartctl's document, or None.
        device: pySMART's reading, or None.
        sheet: the plain text.
    """
    stated = tuple(_from_document(document))
    if stated:
        return stated
    rows, library = tuple(_from_rows(family, sheet)), tuple(_from_library(device))
    return library if len(library) > len(rows) else rows


def newest_result(tests: Iterable[SelfTest]) -> str | None:
    """How the newest test that is not still running ended, or None."""
    for test in tests:
        if not any(word in test.result.lower() for word in _RUNNING):
            return test.result
    return None


def _from_document(document: Document | None) -> Iterator[SelfTest]:
    ata = ("ata_smart_self_test_log",)
    for row in rows_at(document, *ata, "extended", "table") or rows_at(document, *ata, "standard", "table"):
        name, result = text_at(row, "type", "string"), text_at(row, "status", "string")
        if name and result:
            yield _test(
                name,
                result,
                hours=natural_at(row, "lifetime_hours"),
                lba=natural_at(row, "lba"),
                passed=flag_at(row, "status", "passed"),
            )
    for row in rows_at(document, "nvme_self_test_log", "table"):
        name, result = text_at(row, "self_test_code", "string"), text_at(row, "self_test_result", "string")
        if name and result:
            yield _test(name, result, hours=natural_at(row, "power_on_hours"), lba=natural_at(row, "lba"))


def _from_library(device: Any) -> Iterator[SelfTest]:
    for entry in getattr(device, "tests", None) or ():
        # -1 is the library's own mark of a running test; a result without a letter is another column.
        if entry.type and re.search("[A-Za-z]", str(entry.status or "")) and entry.num != -1:
            yield _test(
                str(entry.type),
                str(entry.status),
                hours=whole(str(entry.hours)),
                lba=_lba(str(entry.LBA)),
                medium=str(entry.sense or "") == "0x3",
            )


def _from_rows(family: Family, sheet: Sheet) -> Iterator[SelfTest]:
    for line in _log_lines(sheet):
        found = _ROWS[family].fullmatch(line)
        if found is not None:
            yield _test(
                found["name"],
                found["result"],
                hours=whole(found["hours"]),
                lba=_lba(found["lba"]),
                medium=family is Family.SCSI and found["key"] == "0x3",
            )


def _log_lines(sheet: Sheet) -> Iterator[str]:
    """The lines below the log's headline: tables of other sorts look much like it."""
    inside = False
    for line in sheet.lines:
        if "self-test log" in line.lower():
            inside = "selective" not in line.lower()
        elif not line.strip():
            inside = False
        elif inside:
            yield line.strip()


def _lba(text: str) -> int | None:
    """The first failing block: decimal, or hexadecimal with its mark, as old versions print it for SCSI."""
    if re.fullmatch(r"0x[0-9a-fA-F]{1,16}", text):
        return int(text, 16)
    return int(text) if re.fullmatch(r"[0-9]{1,20}", text) else None


def _test(
    name: str,
    result: str,
    *,
    hours: int | None,
    lba: int | None,
    passed: bool | None = None,
    medium: bool = False,
) -> SelfTest:
    """One entry, with what its words mean.

    ATA has a word of its own for a sector that could not be read. SCSI and NVMe say which part of the test
    failed; there it was a sector where the drive names one, or where the SCSI sense key says medium error (3h).
    """
    # Behind some results smartctl sets an arrow that points at the next column.
    head, arrow, _ = result.partition("->")
    result = (head.rstrip("- \t") or result) if arrow else result
    lower = result.lower()
    if _FATAL not in lower and any(word in lower for word in _NEITHER):
        ended: bool | None = None
    elif any(word in lower for word in _FAILED):
        ended = False
    elif passed is not None:
        ended = passed
    else:
        ended = True if lower in {"completed", "completed without error"} else None
    segment = "segment" in lower and lba is not None
    return SelfTest(
        name=name,
        result=result,
        extended="extended" in name.lower() or "long" in name.lower(),
        passed=ended,
        unreadable=ended is False and ("read failure" in lower or segment or medium),
        hours=hours,
        lba=lba if ended is False else None,
    )
