"""What every invented drive has in common: its hours, its bay, its warmth, and the kernel's counters of it."""

from abc import ABC, abstractmethod
from dataclasses import dataclass
from random import Random

from diskwatch.records import Drive, Identity, IoCounts, Kind, SelfTest
from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.document import OUI
from diskwatch.rehearsal.heat import Warmth
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.queue import Served
from diskwatch.rehearsal.scenario import DriveSpec
from diskwatch.rehearsal.told import Told
from diskwatch.rehearsal.workload import Work, Workload, limited

PAST_REQUEST = 65_536
"""Bytes a request that a drive moved before the scenario began."""

_TESTS_KEPT = {False: 21, True: 20}
"""Entries of the self-test log: of an ATA drive, and of one that speaks NVMe."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """A span of time as a drive meets it.

    Attributes:
        at: its end, UTC seconds since 1970.
        seconds: how long.
        air: temperature of the air around it, °C.
        draught: what the fan moves, 1 as built.
    """

    at: int
    seconds: int
    air: float
    draught: float

    @property
    def days(self) -> float:
        """How long, in days."""
        return self.seconds / 86_400


class InventedDrive(ABC):
    """A drive that lives; subclasses know what it is made of."""

    kind: Kind
    limit: int

    def __init__(self, spec: DriveSpec, number: int, seed: int, bay: Bay, workload: Workload) -> None:
        """Make it as it was when it came into the machine."""
        self.spec, self.number, self.bay, self.workload = spec, number, bay, workload
        self.firmware = spec.firmware
        self.alive, self.reachable, self.asleep = True, True, False
        self.rng: Random = stream(seed, spec.serial, "life")
        self.seconds_on = float(spec.age_hours * 3_600)
        self.cycles = spec.cycles
        self.crc = spec.crc
        self.timeouts = 0
        self.unsafe = spec.unsafe
        self.warmth = self.new_warmth()
        self.tests: tuple[SelfTest, ...] = ()
        self.drive_read, self.drive_written = spec.read_bytes, spec.written_bytes
        self.read_commands = spec.read_bytes // PAST_REQUEST
        self.write_commands = spec.written_bytes // PAST_REQUEST
        self.appearances = 1
        self._fresh = True
        self._totals = [0, 0, 0, 0]
        self._times = [0.0, 0.0, 0.0]

    @property
    def hours(self) -> int:
        """Powered hours."""
        return int(self.seconds_on // 3_600)

    @property
    def celsius(self) -> int:
        """Temperature in whole degrees, as far as its sensor goes: 0 to 125 (practice)."""
        return min(125, max(0, round(self.warmth.celsius)))

    @property
    def drive(self) -> Drive:
        """Who it is."""
        spec = self.spec
        eui, naa = f"eui.{OUI:06x}{self.number:010x}", f"naa.5{OUI:06x}{self.number:09x}"
        return Drive(
            identity=Identity(
                wwn=eui if self.kind is Kind.NVME else naa,
                model=spec.model,
                serial=spec.serial,
                path=spec.device,
            ),
            kind=self.kind,
            firmware=self.firmware,
            capacity_bytes=spec.capacity,
            rotation_rpm=spec.rpm if self.kind is Kind.HDD else None,
        )

    @property
    def counts(self) -> IoCounts:
        """The kernel's totals since the device appeared."""
        reads, writes, read_bytes, write_bytes = self._totals
        read_ms, write_ms, busy_ms = map(int, self._times)
        return IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=read_bytes,
            write_bytes=write_bytes,
            read_ms=read_ms,
            write_ms=write_ms,
            busy_ms=busy_ms,
        )

    @property
    def busy_ms(self) -> float:
        """Time in which a request was under way since the device appeared."""
        return self._times[2]

    def appear(self) -> None:
        """The kernel finds it, after a start of its own or of the machine, and begins its totals anew."""
        self.appearances += 1
        self._totals = [0, 0, 0, 0]
        self._times = [0.0, 0.0, 0.0]

    def power_up(self) -> None:
        """Start."""
        self.cycles += 1
        self.asleep, self._fresh = False, True
        self.appear()

    def lose_power(self, times: int) -> None:
        """Power goes away without notice and comes back: the drive starts, and the kernel finds it anew."""
        self.unsafe += times
        self.cycles += times
        self.asleep, self._fresh = False, True
        self.appear()

    def live(self, span: Span, work: Work) -> None:
        """Let a span pass, switched on, and do its work."""
        self.seconds_on += span.seconds
        moving = work.reads + work.writes > 0
        before = self.busy_ms
        if moving:
            work = limited(work, self.can_do(span, work))
            self._do(span, work)
        used = min(1.0, (self.busy_ms - before) / (span.seconds * 1000))
        # A start turns the platters, so that a drive is awake at first even where nobody wants it.
        self.asleep, self._fresh = self.spec.sleeps and not moving and not self._fresh, False
        self.warmth.live(
            span.air, seconds=span.seconds, used=used, draught=span.draught * (2.0 if self.asleep else 1.0)
        )
        damaged, hung = self.bay.errors(self.rng, span.days, moving=moving)
        self.crc += damaged
        self.timeouts += hung
        self.age(span, work)

    def _do(self, span: Span, work: Work) -> None:
        reading, writing = self.serve(span, work)
        for place, amount in enumerate((work.reads, work.writes, work.read_bytes, work.write_bytes)):
            self._totals[place] += amount
        for place, time in enumerate((reading.total_ms, writing.total_ms, reading.busy_ms + writing.busy_ms)):
            self._times[place] += time
        self.drive_read += work.read_bytes
        self.drive_written += work.write_bytes
        self.read_commands += work.reads
        self.write_commands += work.writes

    def test(self, *, extended: bool) -> None:
        """Run its own test, as its owner asked."""
        found = self.first_bad() if extended else None
        nvme, name = self.kind is Kind.NVME, "Extended" if extended else "Short"
        failed = "Completed: failed segments" if nvme else "Completed: read failure"
        entry = SelfTest(
            name=name if nvme else f"{name} offline",
            result="Completed without error" if found is None else failed,
            extended=extended,
            passed=found is None,
            unreadable=found is not None,
            hours=self.hours if nvme else self.hours & 0xFFFF,  # ATA's field has 16 bits
            lba=found,
        )
        self.tests = (entry, *self.tests)[: _TESTS_KEPT[nvme]]

    @abstractmethod
    def new_warmth(self) -> Warmth:
        """How it warms."""

    @abstractmethod
    def can_do(self, span: Span, work: Work) -> float:
        """The share of a work that the drive has time for in a span; above 1 where it has time to spare."""

    @abstractmethod
    def serve(self, span: Span, work: Work) -> tuple[Served, Served]:
        """Do reads and writes; how long they took."""

    @abstractmethod
    def age(self, span: Span, work: Work) -> None:
        """Wear, defects and repairs of a span."""

    @abstractmethod
    def first_bad(self) -> int | None:
        """The first block that an extended test could not read, or None."""

    @abstractmethod
    def told(self) -> Told:
        """What it would state of itself now."""
