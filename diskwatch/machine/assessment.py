"""What a drive's own firmware thinks of the drive: its verdict, and what it warns of instead of one.

Sources: SPC, additional sense codes: 5Dh is a predicted failure, but with qualifier FFh a prediction that is
marked as false, for tests; 0Bh is a warning, and no verdict. Numbers of qualifiers from memory of that table.
smartctl calls all three not passed, in its text and in its document alike.
"""

import re
from collections.abc import Iterator

from diskwatch.machine.document import Document, dig, flag_at, natural_at, text_at
from diskwatch.machine.held import Family
from diskwatch.machine.text import Sheet
from diskwatch.records import DriveWarning, SignalKind, Value

_PREDICTED, _WARNING = 0x5D, 0x0B
_FALSE = 0xFF

_MEANT: dict[int, DriveWarning] = {
    0x01: DriveWarning.TEMPERATURE,
    0x02: DriveWarning.ENCLOSURE,
    0x03: DriveWarning.SELF_TEST,
    0x04: DriveWarning.SCAN,
    0x05: DriveWarning.SCAN,
    0x06: DriveWarning.CACHE,
    0x07: DriveWarning.CACHE,
    0x08: DriveWarning.POWER,
    0x09: DriveWarning.STATISTICS,
    **dict.fromkeys(range(0x0A, 0x0E), DriveWarning.TEMPERATURE),
    **dict.fromkeys(range(0x0E, 0x12), DriveWarning.HUMIDITY),
    0x12: DriveWarning.FIRMWARE,
    0x13: DriveWarning.FIRMWARE,
    0x14: DriveWarning.ELEMENT,
}
"""By qualifier of the code 0Bh."""

_SAID: tuple[tuple[str, DriveWarning], ...] = (
    ("temperature", DriveWarning.TEMPERATURE),
    ("enclosure", DriveWarning.ENCLOSURE),
    ("self-test", DriveWarning.SELF_TEST),
    ("scan detected", DriveWarning.SCAN),
    ("cache", DriveWarning.CACHE),
    ("power loss", DriveWarning.POWER),
    ("statistics", DriveWarning.STATISTICS),
    ("humidity", DriveWarning.HUMIDITY),
    ("microcode", DriveWarning.FIRMWARE),
    ("element", DriveWarning.ELEMENT),
)
"""Pieces of the standard's wordings, where no code stands beside them."""

_CODES = re.compile(r"\[asc=([0-9a-fA-F]{1,2}), ascq=([0-9a-fA-F]{1,2})\]")
_FAILED = ("fail", "impending", "threshold exceeded")

_NO_WORD = "the drive gives no answer that is known"
_WARNS = "the drive warns of something and gives no verdict"
_TESTS = "the drive tries out its prediction of failure, which it marks as false"


def assessment(family: Family, document: Document | None, sheet: Sheet) -> Iterator[Value]:
    """The verdict, and for SCSI drives what they warn of where they give none.

    Only words that are known to say so make it passed or failed: pySMART calls all but one word failed, also
    the "UNKNOWN!" that stands for no answer. An NVMe drive has no such verdict: smartctl prints failed wherever
    a critical warning stands, be it for heat alone. The source tells the two apart.

    Args:
        family: which language the drive speaks.
        document: smartctl's document, or None; where it has the verdict, that holds.
        sheet: the plain text.
    """
    source = "critical warning" if family is Family.NVME else "SMART status"
    passed = flag_at(document, "smart_status", "passed")
    printed = sheet.get("SMART overall-health self-assessment test result", "SMART Health Status")
    if passed is None and printed is None:
        return
    warning = _warning(document, printed) if family is Family.SCSI and passed is not True else None
    if warning is not None:
        reason = _TESTS if warning is DriveWarning.TEST else _WARNS
        yield _word("self-assessment", None, source, reason)
        yield _word("drive-warning", warning.value, source)
        return
    verdict = _said(printed or "") if passed is None else ("failed" if passed is False else "passed")
    yield _word("self-assessment", verdict, source, None if verdict is not None else _NO_WORD)


def _word(signal: str, word: str | None, source: str, reason: str | None = None) -> Value:
    return Value(signal=signal, value=word, unit="word", kind=SignalKind.WORD, source=source, reason=reason)


def _said(printed: str) -> str | None:
    lower = printed.lower()
    if lower in {"passed", "ok"}:
        return "passed"
    return "failed" if any(word in lower for word in _FAILED) else None


def _warning(document: Document | None, printed: str | None) -> DriveWarning | None:
    """What a drive warns of that predicts no failure; None where it does, or where nothing is known."""
    codes = _codes(document, printed)
    if codes is None:
        return _warning_in((text_at(document, "smart_status", "scsi", "ie_string") or printed or "").lower())
    code, qualifier = codes
    if code == _WARNING:
        return _MEANT.get(qualifier, DriveWarning.UNNAMED)
    return DriveWarning.TEST if (code, qualifier) == (_PREDICTED, _FALSE) else None


def _codes(document: Document | None, printed: str | None) -> tuple[int, int] | None:
    stated = dig(document, "smart_status", "scsi")
    code, qualifier = (natural_at(stated, key, most=0xFF) for key in ("asc", "ascq"))
    if code is not None and qualifier is not None:
        return code, qualifier
    found = _CODES.search(printed or "")
    return (int(found[1], 16), int(found[2], 16)) if found is not None else None


def _warning_in(lower: str) -> DriveWarning | None:
    if "(false)" in lower:
        return DriveWarning.TEST
    if not lower.startswith("warning"):
        return None
    return next((warning for piece, warning in _SAID if piece in lower), DriveWarning.UNNAMED)
