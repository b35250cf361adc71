"""What the kernel's ``stat`` file of a disk tells beyond psutil: discards, flushes, and requests under way."""

from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.disks import SECTOR
from diskwatch.machine.kernel_files import text_of


@dataclass(frozen=True, slots=True, kw_only=True)
class Stat:
    """Fields of ``/sys/block/D/stat`` (Linux, Documentation/block/stat.rst, numbered from 1 there).

    All of one look, since the kernel prints them together. What an older kernel does not print is None:
    discards came with 4.18, flushes with 5.5.

    Attributes:
        in_flight: requests handed to the drive and not yet answered (field 9). A flush is not among them.
        discards: discards completed (field 12).
        discard_bytes: bytes discarded (field 14, in sectors of 512 bytes).
        discard_ms: time that discards took, summed over requests, milliseconds, 32 bits wide (field 15).
        flushes: flushes completed (field 16).
        flush_ms: time that flushes took, summed over requests, milliseconds, 32 bits wide (field 17).
    """

    in_flight: int
    discards: int | None = None
    discard_bytes: int | None = None
    discard_ms: int | None = None
    flushes: int | None = None
    flush_ms: int | None = None


def stat_of(sys_root: Path, name: str) -> Stat | None:
    """Look at one disk's ``stat``; None where there is none, or where the kernel was told not to count."""
    folder = sys_root / "block" / name
    # With queue/iostats at 0 all fields stand still, which would read as a drive that does nothing.
    if text_of(folder / "queue" / "iostats") == "0":
        return None
    return parse(text_of(folder / "stat") or "")


def parse(text: str) -> Stat | None:
    """Read a ``stat`` file of any kernel; None where it is none. More fields than are known do no harm."""
    words = text.split()
    if len(words) < 11 or not all(word.isascii() and word.isdigit() for word in words):
        return None
    fields: list[int | None] = [int(word) for word in words]
    fields += [None] * (17 - len(fields))
    sectors = fields[13]
    return Stat(
        in_flight=int(words[8]),
        discards=fields[11],
        discard_bytes=sectors * SECTOR if sectors is not None else None,
        discard_ms=fields[14],
        flushes=fields[15],
        flush_ms=fields[16],
    )
