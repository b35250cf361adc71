"""Invented disks under the probe: their reads take the time that their mechanics take.

Behind the same protocol as the prober of a real machine (`diskwatch.machine.probe.Prober`). A band is a
thousandth of the surface, so that seeks are short; heads take turns within it. Nobody else is ever at work:
what a disturbance does is tried on real block devices. The reads are not among the invented kernel's counts.
"""

from diskwatch.machine.probe import READ_BYTES, Brought, Wanted
from diskwatch.machine.protocol import Found
from diskwatch.records import REQUEST_BYTES
from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.disk import Disk
from diskwatch.rehearsal.machine import InventedMachine
from diskwatch.rehearsal.rotating import Mix

_BAND = 0.001
"""Share of the surface that a probe's small reads are spread over."""


class InventedProber:
    """Probes the disks of an invented machine."""

    def __init__(self, machine: InventedMachine, seed: int) -> None:
        """Begin.

        Args:
            machine: whose disks.
            seed: of chance; the same one always gives the same times.
        """
        self._machine = machine
        self._chance = {serial: stream(seed, serial, "probe") for serial in machine.drives}

    def probe(self, found: Found, wanted: Wanted) -> Brought:
        """Probe one disk; one that is no disk, sleeps or is away brings nothing."""
        drive = next(one for one in self._machine.drives.values() if one.spec.device == found.address.node)
        if not isinstance(drive, Disk) or drive.asleep or not drive.reachable:
            return Brought(dropped="it is no disk that is awake.")
        chance = self._chance[drive.spec.serial]
        where = chance.random()
        small = Mix(size=READ_BYTES, sequential=0.0, cached=0.0, stroke=_BAND, place=where)
        large = Mix(size=REQUEST_BYTES, sequential=1.0, cached=0.0, stroke=0.0, place=chance.random())
        left = float(wanted.disk_ms)
        taken: list[list[int]] = [[], []]
        for kept, mix, count, reserve in (
            (taken[0], small, wanted.reads, wanted.requests * 2.5),
            (taken[1], large, wanted.requests, 0.0),
        ):
            read = drive.head.reading(mix)
            while len(kept) < count and left > reserve:
                time = drive.platters.request_ms(chance, read)
                left -= time
                kept.append(round(time * 1000))
        return Brought(
            place=int(where * drive.spec.capacity),
            band_us=tuple(taken[0]),
            slice_us=tuple(taken[1]),
            disk_ms=round(wanted.disk_ms - left),
        )

    def stop(self) -> None:
        """Nothing is ever under way."""
