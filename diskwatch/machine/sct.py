"""SCT status of ATA drives: their own temperature limits, and whether they may be asked for it."""

from diskwatch.machine import device_statistics, packing
from diskwatch.machine.document import Document, dig, number_at
from diskwatch.machine.text import Sheet, whole

_FREEZES = "TOSHIBA DT01ACA"
"""Drives of this family can freeze under heavy writing when their SCT status is asked for; Linux leaves them
alone for it (``drivers/hwmon/drivetemp.c``)."""


def may_be_asked(document: Document | None, sheet: Sheet, model: str | None) -> bool:
    """Whether a drive says that it has SCT status, and is not of the family that it harms.

    Args:
        document: smartctl's document, or None.
        sheet: the plain text.
        model: the drive's model; one that is not known may be one of the family.
    """
    if model is None or " ".join(model.split()).upper().startswith(_FREEZES):
        return False
    return dig(document, "ata_sct_capabilities") is not None or sheet.holds("SCT Status supported")


def limits(document: Document | None, sheet: Sheet) -> tuple[int | None, int | None]:
    """The drive's own temperature limits, warning and critical, in degrees Celsius.

    Where SCT states none, the greatest temperature that the drive is made for (log 04h) is taken for the first.
    """
    warning, critical = (_limit(document, key) for key in ("op_limit_max", "limit_max"))
    if warning is None:
        warning = _sane(whole(sheet.get("Specified Max Operating Temperature") or ""))
    if warning is None:
        warning = device_statistics.maximum_celsius(document, sheet)
    return warning, critical


def _limit(document: Document | None, key: str) -> int | None:
    told = number_at(document, "ata_sct_status", "temperature", key)
    return _sane(told if told is not None else number_at(document, "temperature", key))


def _sane(told: int | None) -> int | None:
    return told if told is not None and 0 < told <= packing.HOTTEST else None
