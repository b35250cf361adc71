"""The probe of a disk that is awake and idle: a few small reads, timed, given up as soon as anyone else reads.

A disk that has to read again what it could not read at once loses whole turns, before any counter of its own
moves (see `diskwatch.trends.late_reads`). To see turns, reads must be alike but for the wait for the sector:
they lie in one narrow band, another one each day, behind a first read that moves the heads there. Then a slice
is read in one go (`diskwatch.trends.slices`).

Manners: past the page cache, never written, a bounded time, nothing on a disk that the kernel suspended, and
nothing kept of a bite during which anyone else's request came to the disk or the computer let this thread wait.
"""

import time
from dataclasses import dataclass, replace
from pathlib import Path
from random import Random
from threading import Event
from typing import Protocol

from diskwatch.machine.disks import SECTOR, asleep
from diskwatch.machine.kernel_files import number_of, text_of
from diskwatch.machine.patience import Patience
from diskwatch.machine.protocol import Found
from diskwatch.machine.timed_reads import TimedReads
from diskwatch.records import REQUEST_BYTES

READ_BYTES = 4096
"""Bytes of one small read: the unit that drives keep today (common practice, no source)."""

BITE = 32
"""Reads between two looks at whether anyone else came: what is lost by a disturbance."""

QUIET = 1.0
"""Seconds without any request that count as idle."""

AT_WORK, THE_END = "it was at work.", "the watch ends."
"""Why a probe was dropped before it read anything, in words that say nothing of the disk."""

LONGEST = 15.0
"""Seconds after which a probe is no longer waited for."""

_BAND_SHARE = 1000
_LEAST_BAND = 16 * 1024 * 1024
_GOLDEN = 0.6180339887498949
"""Its multiples fall into a line's widest gaps one after another (the golden ratio's property, from memory)."""

_MOST_READ = 40_000  # microseconds: a budget must not be overdrawn by one ordinary read
_WOKEN = 1_000_000  # microseconds: platters that stood still take seconds
_LET_WAIT = 1_000_000  # nanoseconds within a bite


@dataclass(frozen=True, slots=True, kw_only=True)
class Wanted:
    """What a probe is to read.

    Attributes:
        day: UTC day number; it chooses the band.
        reads: small reads in a band.
        requests: requests of a slice.
        disk_ms: how long the disk may be kept busy at most, milliseconds.
    """

    day: int
    reads: int
    requests: int
    disk_ms: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Brought:
    """What a probe brought.

    Attributes:
        place: the first byte of its band.
        band_us: what undisturbed small reads took, microseconds; None for one that never came back.
        slice_us: what undisturbed requests of the slice took, in order of place; likewise.
        disk_ms: how long the disk was kept busy, disturbed reads included, milliseconds.
        dropped: why it ended early, as a whole sentence about "it"; None where it came to its end.
    """

    place: int = 0
    band_us: tuple[int | None, ...] = ()
    slice_us: tuple[int | None, ...] = ()
    disk_ms: int = 0
    dropped: str | None = None


class Prober(Protocol):
    """Whoever can probe a disk."""

    def probe(self, found: Found, wanted: Wanted) -> Brought:
        """Probe one; bounded in time."""
        ...

    def stop(self) -> None:
        """End a probe that is under way, and let none begin."""
        ...


@dataclass(frozen=True, slots=True, kw_only=True)
class _Look:
    """A disk's counters: sectors read, all requests that change nothing of ours, requests under way."""

    sectors: int
    others: int
    in_flight: int


class DiskProber:
    """Probes disks of this computer."""

    def __init__(
        self,
        *,
        sys_root: Path = Path("/sys"),
        proc_root: Path = Path("/proc"),
        dev_root: Path = Path("/dev"),
        any_disk: bool = False,
        chance: Random | None = None,
    ) -> None:
        """Nothing is read yet.

        Args:
            sys_root: where sysfs is mounted.
            proc_root: where procfs is mounted.
            dev_root: where device nodes are.
            any_disk: also probe what does not turn; for tests of the manners alone.
            chance: chooses places; None for chance itself.
        """
        self._sys, self._proc, self._dev = sys_root, proc_root, dev_root
        self._any_disk = any_disk
        self._chance = Random() if chance is None else chance  # noqa: S311 - places to read, no secret
        self._ending = Event()
        self._asked = Patience(self._probe, seconds=LONGEST)

    def stop(self) -> None:
        """End a probe that is under way, and let none begin."""
        self._ending.set()

    def probe(self, found: Found, wanted: Wanted) -> Brought:
        """Probe one disk, see `Prober`; what hangs is not waited for, nor probed again before it answers."""
        if len(found.blocks) != 1:
            return Brought(dropped="it has not exactly one block device.")
        return self._asked(found.blocks[0], wanted) or Brought(
            disk_ms=wanted.disk_ms, dropped="its reads did not come back in time."
        )

    def _probe(self, block: str, wanted: Wanted) -> Brought:
        unfit = self._unfit(block)
        size = (number_of(self._sys / "block" / block / "size") or 0) * SECTOR
        if unfit is None and size < max(_LEAST_BAND, wanted.requests * REQUEST_BYTES):
            unfit = "it is too small."
        if unfit is None and not self._idle(block):
            unfit = AT_WORK
        if unfit is not None:
            return Brought(dropped=unfit)
        try:
            with TimedReads(self._dev / block, REQUEST_BYTES) as disk:
                return self._read(block, disk, size, wanted)
        except OSError as error:
            return Brought(dropped=f"it could not be opened for reading: {error.strerror}.")

    def _unfit(self, block: str) -> str | None:
        queue = self._sys / "block" / block / "queue"
        if number_of(queue / "rotational") != 1 and not self._any_disk:
            return "its platters do not turn, as the kernel has it."
        if text_of(queue / "zoned") == "host-managed":
            return "some of its zones cannot be read before they are written."
        if asleep(self._sys, block):
            return "it is suspended by the kernel."
        return None

    def _idle(self, block: str) -> bool:
        before = self._look(block)
        self._ending.wait(QUIET)
        return before is not None and before == self._look(block) and before.in_flight == 0

    def _look(self, block: str) -> _Look | None:
        """Fields of ``/sys/block/D/stat`` (Linux, Documentation/block/stat.rst), numbered from 1 there."""
        words = (text_of(self._sys / "block" / block / "stat") or "").split()
        if len(words) < 11 or not all(word.isdigit() for word in words):
            return None
        writes, discards, flushes = (int(words[at]) if len(words) > at else 0 for at in (4, 11, 15))
        return _Look(sectors=int(words[2]), others=writes + discards + flushes, in_flight=int(words[8]))

    def _read(self, block: str, disk: TimedReads, size: int, wanted: Wanted) -> Brought:
        band = min(size, max(_LEAST_BAND, size // _BAND_SHARE))
        place = _whole(wanted.day * _GOLDEN % 1 * (size - band), READ_BYTES)
        first = self._spot(place, band)
        there = disk.read(first, READ_BYTES)
        if there is not None and there >= _WOKEN:
            return Brought(
                place=place, disk_ms=disk.busy_us // 1000, dropped="its platters seemed to stand still."
            )
        spots = [self._spot(place, band) for _ in range(wanted.reads)]
        # The band may not use up what the slice needs: about 2 ms a request, seen on common disks.
        most = wanted.disk_ms * 1000 - wanted.requests * 2_500
        band_us, dropped = self._bites(block, disk, [(spot, READ_BYTES) for spot in spots], most)
        slice_us: tuple[int | None, ...] = ()
        if dropped is None and wanted.requests:
            start = _whole(self._chance.random() * (size - wanted.requests * REQUEST_BYTES), REQUEST_BYTES)
            disk.read(start, READ_BYTES)
            run = [(start + number * REQUEST_BYTES, REQUEST_BYTES) for number in range(wanted.requests)]
            slice_us, dropped = self._bites(block, disk, run, wanted.disk_ms * 1000)
        return Brought(
            place=place,
            band_us=band_us,
            slice_us=slice_us,
            disk_ms=-(-disk.busy_us // 1000),
            dropped=dropped,
        )

    def _spot(self, place: int, band: int) -> int:
        return place + self._chance.randrange(max(1, band // READ_BYTES)) * READ_BYTES

    def _bites(
        self, block: str, disk: TimedReads, reads: list[tuple[int, int]], most_us: int
    ) -> tuple[tuple[int | None, ...], str | None]:
        """Read bite by bite, until the reads or the time are used up or something comes between."""
        kept: list[int | None] = []
        for begin in range(0, len(reads), BITE):
            before, waited = self._look(block), self._waited()
            bite: list[int | None] = []
            sectors = 0
            for spot, length in reads[begin : begin + BITE]:
                if self._ending.is_set():
                    return tuple(kept), THE_END
                if disk.busy_us + _MOST_READ > most_us:
                    break
                bite.append(disk.read(spot, length))
                if bite[-1] is None:
                    # Nobody else's request can be the cause, and no more is asked of a disk in trouble.
                    return (*kept, *bite), "a read of it failed."
                sectors += length // SECTOR
            if not self._undisturbed(before, self._settled_look(block), sectors):
                return tuple(kept), "somebody else came to use it."
            if self._let_wait(waited):
                return tuple(kept), "the computer had too much else to do."
            kept += bite
            if len(bite) < len(reads[begin : begin + BITE]):
                break
        return tuple(kept), None

    def _settled_look(self, block: str) -> _Look | None:
        """The counters once our own last read is booked, which may be a moment after it came back."""
        look = self._look(block)
        if look is not None and look.in_flight:
            time.sleep(0.001)
            look = self._look(block)
        return look

    @staticmethod
    def _undisturbed(before: _Look | None, now: _Look | None, sectors: int) -> bool:
        return (
            before is not None
            and now is not None
            and now == replace(before, sectors=before.sectors + sectors, in_flight=0)
        )

    def _waited(self) -> int | None:
        """Nanoseconds that this thread has waited for a processor; None where the kernel does not say.

        The second field of ``schedstat`` (Linux, Documentation/scheduler/sched-stats.rst).
        """
        words = (text_of(self._proc / "thread-self" / "schedstat") or "").split()
        return int(words[1]) if len(words) > 1 and words[1].isdigit() else None

    def _let_wait(self, before: int | None) -> bool:
        now = self._waited()
        return before is not None and now is not None and now - before > _LET_WAIT


def _whole(place: float, block: int) -> int:
    return int(place) // block * block
