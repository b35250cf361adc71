"""An invented solid-state drive, behind ATA or NVMe."""

from diskwatch.records import Kind
from diskwatch.rehearsal import flash, queue
from diskwatch.rehearsal.drive import InventedDrive, Span
from diskwatch.rehearsal.flash import Cells, Chips
from diskwatch.rehearsal.heat import Warmth
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.queue import Served
from diskwatch.rehearsal.scenario import DriveSpec
from diskwatch.rehearsal.told import Row, Told
from diskwatch.rehearsal.workload import Work, Workload

DATA_UNIT = 512_000
"""Bytes in a data unit of the NVMe health log: 1000 times 512, rounded up (NVM Express, log page 02h)."""

_THRESHOLD = 10
"""Percent of spare blocks below which the drive warns (practice)."""

_SPARE_WARNS = 1
_HEAT_WARNS = 2


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
        self.hot_minutes = 0.0
        self.life_busy_ms = 0.0
        super().__init__(spec, number, seed, bay, workload)

    def new_warmth(self) -> Warmth:
        """A card warms within minutes, and much under load."""
        if self.kind is Kind.NVME:
            return Warmth(celsius=26.0, idle=14.0, load=40.0, constant=300.0)
        return Warmth(celsius=24.0, idle=7.0, load=12.0, constant=900.0)

    def can_do(self, span: Span, work: Work) -> float:
        """Reads and writes one after the other; a drive that does several at once is not modelled."""
        mean = max(
            flash.reads(self.chips, work.mix, throttled=self.throttled).mean_ms,
            flash.writes(self.chips, work.mix, cliff=1.0, throttled=self.throttled).mean_ms,
        )
        return queue.FULL * span.seconds * 1000 / ((work.reads + work.writes) * mean)

    def serve(self, span: Span, work: Work) -> tuple[Served, Served]:
        """Reads at one speed, writes at two."""
        cliff = self.cells.write(self.chips, work.write_bytes, span.seconds)
        milliseconds = span.seconds * 1000.0
        reading = flash.reads(self.chips, work.mix, throttled=self.throttled)
        writing = flash.writes(self.chips, work.mix, cliff=cliff, throttled=self.throttled)
        done = (
            queue.together(self.rng, work.reads, milliseconds, reading, direct=work.direct),
            queue.together(self.rng, work.writes, milliseconds, writing, direct=work.direct),
        )
        self.life_busy_ms += done[0].busy_ms + done[1].busy_ms
        return done

    def age(self, span: Span, work: Work) -> None:
        """Wear, heat."""
        self.cells.age(self.rng, self.chips, work.write_bytes, span.days)
        hot = self.warmth.celsius >= self.limit
        self.throttled = self.warmth.celsius >= self.limit - 2
        self.hot_minutes += span.seconds / 60 if hot else 0.0

    def first_bad(self) -> int | None:
        """Its test reads through correction; nothing is modelled that it could not."""
        return None

    def told(self) -> Told:
        """The health log, or an attribute table."""
        spare = self.cells.spare_percent(self.chips)
        celsius = round(self.warmth.celsius)
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
            "num_err_log_entries": self.cells.media_errors,
            "warning_temp_time": int(self.hot_minutes),
            "critical_comp_time": 0,
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
