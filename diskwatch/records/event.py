"""What the machine's other senses tell of a drive: the kernel's log, its file systems, its arrays."""

from dataclasses import dataclass
from enum import StrEnum


class EventKind(StrEnum):
    """What happened to a drive.

    UNREADABLE and UNWRITABLE: a read or write failed for good at a known sector. FAILED: another request did (a
    flush, a discard). PASSING: a command failed and went through when it was tried again. LINK_RESET and
    LINK_SLOWED: the link to it was begun anew, or made slower, without a failed request to explain it.
    TIMED_OUT: it did not answer in time. OFFLINED: the kernel gave it up. CONTROLLER_DOWN: the controller of an
    NVMe drive stopped. NVME: an NVMe command ended with a status that is none of these. FILE_SYSTEM: a file
    system on it met an error. ARRAY: an array dropped it, or mended what it could not read.
    """

    UNREADABLE = "unreadable-sector"
    UNWRITABLE = "write-error"
    FAILED = "request-failed"
    PASSING = "passing-error"
    LINK_RESET = "link-reset"
    LINK_SLOWED = "link-slowed"
    TIMED_OUT = "command-timeout"
    OFFLINED = "device-offlined"
    CONTROLLER_DOWN = "controller-down"
    NVME = "nvme-error"
    FILE_SYSTEM = "file-system-error"
    ARRAY = "array-error"


@dataclass(frozen=True, slots=True, kw_only=True)
class Event:
    """One thing that happened, however many lines told of it.

    Attributes:
        kind: what.
        subject: the kernel's name of the device that it happened to (``sda``, ``nvme0``, ``dm-0``).
        seconds: when, seconds since the machine booted, time asleep left out.
        sector: first failing sector, 512 bytes each, counted on ``subject``; None where none was told.
        medium: whether the drive itself said that its medium is at fault.
        words: the kernel's own words that tell most, to be escaped before they are shown.
        lines: how many lines of the log told of it so far.
    """

    kind: EventKind
    subject: str
    seconds: float
    sector: int | None = None
    medium: bool = False
    words: str = ""
    lines: int = 1
