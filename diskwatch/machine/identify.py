"""What the kernel remembers of an ATA drive's IDENTIFY DEVICE data, so that the drive need not be asked.

The SCSI face that Linux gives an ATA drive cuts its model to 16 letters and its firmware to four. libata keeps
the whole block in ``ata_device/devN.0/id``: 256 words of four hexadecimal digits.

Sources: ATA/ATAPI Command Set, table of IDENTIFY DEVICE data (words 10, 23, 27, 80, 84, 87, 108, 217), word
numbers and validity tests from memory; Linux, Documentation/ABI, sysfs-ata (``id``).
"""

import re
from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, text_of, tidy

_WORDS = 256
_SLOWEST = 0x0401  # rotation rates below are reserved by the standard


@dataclass(frozen=True, slots=True, kw_only=True)
class Identified:
    """The parts of an IDENTIFY block that tell who a drive is.

    Attributes:
        model: whole model, or None.
        serial: serial, or None.
        firmware: firmware revision, or None.
        wwn: world-wide name as ``naa.…``, or None where the drive has none.
        rotating: whether it turns; None where it does not say.
        rotation_rpm: turns a minute, or None.
        statistics: whether it has general purpose logs and a standard that knows Device Statistics (ACS-2 or
            later); None where it does not say.
    """

    model: str | None
    serial: str | None
    firmware: str | None
    wwn: str | None
    rotating: bool | None
    rotation_rpm: int | None
    statistics: bool | None


def remembered(port: Path) -> Identified | None:
    """The IDENTIFY block of the only drive on an ATA port.

    Args:
        port: the port's folder in sysfs (``…/0000:00:17.0/ata3``).

    Returns:
        None where the kernel keeps none, or where the port has more than one drive (a port multiplier, an old
        cable with two), since nothing here says which is meant.
    """
    blocks = [
        block
        for link in names_in(port)
        if re.fullmatch(r"link[\d.]+", link)
        for device in names_in(port / link)
        if re.fullmatch(r"dev[\d.]+", device)
        if (block := parse(text_of(port / link / device / "ata_device" / device / "id") or "")) is not None
    ]
    return blocks[0] if len(blocks) == 1 else None


def parse(text: str) -> Identified | None:
    """Read an IDENTIFY block from its 256 hexadecimal words; None where it is none, or names no drive."""
    words = text.split()
    if len(words) != _WORDS or not all(re.fullmatch(r"[0-9a-fA-F]{4}", word) for word in words):
        return None
    model, serial = _letters(words[27:47]), _letters(words[10:20])
    if model is None and serial is None:
        return None  # an empty slot reads as zeros
    turns = int(words[217], 16)
    return Identified(
        model=model,
        serial=serial,
        firmware=_letters(words[23:27]),
        wwn=_wwn(words),
        rotating=False if turns == 1 else True if _SLOWEST <= turns < 0xFFFF else None,
        rotation_rpm=turns if _SLOWEST <= turns < 0xFFFF else None,
        statistics=_statistics(int(words[80], 16), int(words[84], 16)),
    )


def _statistics(standards: int, features: int) -> bool | None:
    """Word 80 has a bit for each standard, ACS-2 is 9; word 84 has bit 5 for general purpose logs."""
    if standards in {0, 0xFFFF} or features & 0xC000 != 0x4000:
        return None
    return standards >> 9 != 0 and bool(features & 0x20)


def _letters(words: list[str]) -> str | None:
    """ATA text: two letters a word, the first in the high byte."""
    return tidy(bytes.fromhex("".join(words)))


def _wwn(words: list[str]) -> str | None:
    """Words 108 to 111, valid where word 87 says so (bit 8, with bits 15 and 14 reading 01)."""
    name = "".join(words[108:112]).lower()
    valid = int(words[87], 16) & 0xC100 == 0x4100
    return f"naa.{name}" if valid and name.strip("0") else None
