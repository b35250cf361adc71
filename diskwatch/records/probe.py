"""What a day's probe of a disk brought: how long its few reads took."""

from dataclasses import dataclass

REQUEST_BYTES = 256 * 1024
"""Bytes of one request of a slice: 64 units of 4 KiB, each of which may have to be read again."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ProbeDay:
    """One probe of a drive; at most one of a day brings reads, others were disturbed too early.

    Attributes:
        at: when it ended, UTC seconds since 1970.
        place: the first byte of the narrow band that was read.
        band_us: what each read at a random place of the band took, microseconds; None for one that never came
            back. Reads that another program's requests may have disturbed are not among them.
        slice_us: what each request of a slice took that was read in one go, in order of place; likewise.
        disk_ms: how long the disk was kept busy by it, disturbed reads included, milliseconds.
    """

    at: int
    place: int
    band_us: tuple[int | None, ...]
    slice_us: tuple[int | None, ...] = ()
    disk_ms: int
