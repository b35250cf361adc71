"""An invented solid-state drive, behind ATA or NVMe."""

from collections.abc import Sequence

from diskwatch.records import Kind
from diskwatch.rehearsal import flash, queue
from diskwatch.rehearsal.drive import PAST_REQUEST, InventedDrive, Span
from diskwatch.rehearsal.flash import Cells, Chips
from diskwatch.rehearsal.heat import Warmth
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.queue import Served
from diskwatch.rehearsal.rotating import Mix
from diskwatch.rehearsal.scenario import DriveSpec
from diskwatch.rehearsal.told import Logged, Row, Told
from diskwatch.rehearsal.workload import Work, Workload

DATA_UNIT = 512_000
"""Bytes in a data unit of the NVMe health log: 1000 times 512, rounded up (NVM Express, log page 02h)."""

_THRESHOLD = 10
"""Percent of spare blocks below which the drive warns (practice)."""

_SPARE_WARNS = 1
_HEAT_WARNS = 2

_CRITICAL = 6
"""Degrees above the limit for a warning at which the drive calls its temperature critical (practice)."""

_ERRORS_KEPT = 16
"""Entries of the error log that a reader asks for."""


class Solid(InventedDrive):
    """A solid-state drive."""

    limit = 78

    def __init__(self, spec: DriveSpec, number: int, seed: int, bay: Bay, workload: Workload) -> None:
        """Make it as it was when it came into the machine."""
        self.kind = Kind.NVME if spec.kind == "nvme" else Kind.SSD
        self.limit = 78 if self.kind is Kind.NVME else 70
        sata = self.kind is Kind.SSD
        self.chips = Chips(
            capacity=spec.capacity,
            rate=500e6 if sata else 2_000e6,
            turns=spec.rated_turns,
            amplification=spec.amplification,
        )
        self.cells = Cells(written=float(spec.written_bytes), bad_blocks=spec.bad_blocks)
        self.throttled = False
        self.hot_minutes = self.critical_minutes = 0.0
        self.errors = tuple(Logged(count=start) for start in range(spec.cycles, 0, -1)[:_ERRORS_KEPT])
        super().__init__(spec, number, seed, bay, workload)
        # What it moved before cost time too, as much as a request of its mean size takes.
        past = Mix(size=PAST_REQUEST, sequential=0.0, cached=0.0, stroke=1.0)
        self.life_busy_ms = (
            self.read_commands * flash.reads(self.chips, past, throttled=False).mean_ms
            + self.write_commands * flash.writes(self.chips, past, cliff=0.0, throttled=False).mean_ms
        )

    @property
    def logged(self) -> int:
        """Errors in its life; it counts a command that it refuses at every start too, as most do (practice)."""
        return self.cycles + self.cells.media_errors

    def power_up(self) -> None:
        """A start, at which it is asked for something that it does not know."""
        super().power_up()
        self._enter((None,))

    def lose_power(self, times: int) -> None:
        """As many starts as power came back."""
        super().lose_power(times)
        self._enter((None,) * times)

    def _enter(self, errors: Sequence[int | None]) -> None:
        """Enter what was just counted, oldest first: blocks that could not be read, or None for a refusal."""
        newest = enumerate(reversed(errors[-_ERRORS_KEPT:]))
        told = (Logged(count=self.logged - place, lba=lba) for place, lba in newest)
        self.errors = (*told, *self.errors)[:_ERRORS_KEPT]

    def new_warmth(self) -> Warmth:
        """A card warms within minutes, and much under load."""
        if self.kind is Kind.NVME:
            return Warmth(celsius=26.0, idle=14.0, load=40.0, constant=300.0)
        return Warmth(celsius=24.0, idle=7.0, load=12.0, constant=900.0)

    def can_do(self, span: Span, work: Work) -> float:
        """Reads and writes one after the other; a drive that does several at once is not modelled."""
        reading = flash.reads(self.chips, work.reading, throttled=self.throttled).mean_ms
        writing = flash.writes(self.chips, work.writing, cliff=1.0, throttled=self.throttled).mean_ms
        return queue.FULL * span.seconds * 1000 / (work.reads * reading + work.writes * writing)

    def serve(self, span: Span, work: Work) -> tuple[Served, Served]:
        """Reads at one speed, writes at two; each waits for all."""
        cliff = self.cells.write(self.chips, work.write_bytes, span.seconds)
        costs = (
            (work.reads, flash.reads(self.chips, work.reading, throttled=self.throttled)),
            (work.writes, flash.writes(self.chips, work.writing, cliff=cliff, throttled=self.throttled)),
        )
        reading, writing = queue.together(self.rng, span.seconds * 1000.0, costs, direct=work.direct)
        self.life_busy_ms += reading.busy_ms + writing.busy_ms
        return reading, writing

    def age(self, span: Span, work: Work) -> None:
        """Wear, data that is lost, heat."""
        errors = self.cells.media_errors
        self.cells.age(self.rng, self.chips, work.write_bytes, span.days)
        if (more := self.cells.media_errors - errors) > 0:
            self._enter(self.cells.lost[-more:])
        self.throttled = self.warmth.celsius >= self.limit - 2
        critical = self.warmth.above(self.limit + _CRITICAL)
        self.critical_minutes += critical / 60
        self.hot_minutes += (self.warmth.above(self.limit) - critical) / 60

    def first_bad(self) -> int | None:
        """The first block of what it lost; all else its test reads through correction."""
        return min(self.cells.lost, default=None)

    def told(self) -> Told:
        """The health log, or an attribute table."""
        spare = self.cells.spare_percent(self.chips)
        celsius = self.celsius
        low = spare < _THRESHOLD
        return Told(
            model=self.spec.model,
            serial=self.spec.serial,
            number=self.number,
            firmware=self.firmware,
            capacity=self.spec.capacity,
            rpm=None if self.kind is Kind.NVME else 0,
            hours=self.hours,
            cycles=self.cycles,
            celsius=celsius,
            limit=self.limit,
            passed=not low,
            rows=() if self.kind is Kind.NVME else self._rows(spare, celsius),
            log=self._log(spare, celsius) if self.kind is Kind.NVME else {},
            errors=self.errors if self.kind is Kind.NVME else (),
            tests=self.tests,
        )

    def _log(self, spare: int, celsius: int) -> dict[str, int]:
        warning = (_SPARE_WARNS if spare < _THRESHOLD else 0) | (_HEAT_WARNS if celsius >= self.limit else 0)
        return {
            "critical_warning": warning,
            "temperature": celsius,
            "available_spare": spare,
            "available_spare_threshold": _THRESHOLD,
            "percentage_used": self.chips.used_percent(self.cells.written),
            "data_units_read": -(-self.drive_read // DATA_UNIT),
            "data_units_written": -(-self.drive_written // DATA_UNIT),
            "host_reads": self.read_commands,
            "host_writes": self.write_commands,
            "controller_busy_time": int(self.life_busy_ms // 60_000),
            "power_cycles": self.cycles,
            "power_on_hours": self.hours,
            "unsafe_shutdowns": self.unsafe,
            "media_errors": self.cells.media_errors,
            "num_err_log_entries": self.logged,
            "warning_temp_time": int(self.hot_minutes),
            "critical_comp_time": int(self.critical_minutes),
        }

    def _rows(self, spare: int, celsius: int) -> tuple[Row, ...]:
        left = max(1, 100 - self.chips.used_percent(self.cells.written))
        share = max(1, spare)
        return (
            Row(number=5, name="Retired_Block_Count", raw=self.cells.bad_blocks),
            Row(number=9, name="Power_On_Hours", raw=self.hours),
            Row(number=12, name="Power_Cycle_Count", raw=self.cycles),
            Row(number=174, name="Unexpect_Power_Loss_Ct", raw=self.unsafe),
            Row(number=187, name="Reported_Uncorrect", raw=self.cells.media_errors),
            Row(number=194, name="Temperature_Celsius", raw=celsius, value=max(1, 100 - celsius)),
            Row(number=199, name="UDMA_CRC_Error_Count", raw=self.crc),
            Row(number=202, name="Percent_Lifetime_Remain", raw=100 - left, value=left, worst=left),
            Row(
                number=232,
                name="Perc_Avail_Resrvd_Space",
                raw=share,
                value=share,
                worst=share,
                threshold=_THRESHOLD,
                prefail=True,
            ),
            Row(number=241, name="Total_LBAs_Written", raw=self.drive_written // 512),
            Row(number=242, name="Total_LBAs_Read", raw=self.drive_read // 512),
        )
