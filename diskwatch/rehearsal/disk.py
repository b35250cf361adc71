"""An invented hard disk: platters, a surface, heads."""

from random import Random

from diskwatch.records import Kind
from diskwatch.rehearsal import queue
from diskwatch.rehearsal.chance import poisson
from diskwatch.rehearsal.drive import InventedDrive, Span
from diskwatch.rehearsal.heads import Head
from diskwatch.rehearsal.heat import Warmth
from diskwatch.rehearsal.layout import Layout
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.media import SECTORS, Surface, Touched
from diskwatch.rehearsal.queue import Served
from diskwatch.rehearsal.rotating import Mix, Platters
from diskwatch.rehearsal.scenario import DriveSpec
from diskwatch.rehearsal.told import Row, Told
from diskwatch.rehearsal.workload import Work, Workload

FEW = 60
"""Requests of a span that are served one by one."""

_SPIN_RETRY = 0.00002
_SPIN_RETRY_AFTER_LOSS = 0.005
"""Chance that the motor needs a second attempt at a start, and at one after mains that failed (practice)."""

_HANGS = 0.2
"""Share of reads that are given up after so long that the computer gave up waiting first."""

_SPARE_LIMIT = 36
"""Threshold of the replaced sectors' normalised value; makers set 5 to 140 (practice)."""


class Disk(InventedDrive):
    """A hard disk."""

    kind = Kind.HDD
    limit = 60

    def __init__(self, spec: DriveSpec, number: int, seed: int, bay: Bay, workload: Workload) -> None:
        """Make it as it was when it came into the machine."""
        self.platters = Platters(rpm=spec.rpm)
        layout = Layout(capacity=spec.capacity, platters=self.platters)
        self.surface = Surface(layout=layout, reallocated=spec.reallocated)
        self.head = Head(number=0, of=layout.heads)
        self.spin_retries = 0
        self.retracts = spec.unsafe
        self.loads = spec.cycles * 3
        self.worst_celsius = 0
        super().__init__(spec, number, seed, bay, workload)
        while self.surface.pending < spec.pending:
            self.surface.waiting[int(self.rng.random() * layout.units)] = False

    def new_warmth(self) -> Warmth:
        """A disk takes half an hour to warm."""
        return Warmth(celsius=24.0, idle=15.0, load=8.0)

    def weaken_head(self, growth: float) -> None:
        """One of its heads begins to read badly.

        Args:
            growth: share by which the reads under it that fail at first grow a day.
        """
        heads = self.head.of
        self.head = Head(number=int(self.rng.random() * heads), of=heads, growth=growth)

    def power_up(self) -> None:
        """The motor starts; now and then it needs a second attempt."""
        super().power_up()
        self.spin_retries += poisson(self.rng, _SPIN_RETRY)

    def lose_power(self, times: int) -> None:
        """Heads retract in an emergency, and the motor starts again on mains that may still be weak."""
        super().lose_power(times)
        self.retracts += times
        self.spin_retries += poisson(self.rng, times * _SPIN_RETRY_AFTER_LOSS)

    def can_do(self, span: Span, work: Work) -> float:
        """One arm serves all."""
        return (
            queue.FULL
            * span.seconds
            * 1000
            / sum(count * self.platters.service(mix).mean_ms for count, mix in self._sorts(work))
        )

    def _sorts(self, work: Work) -> tuple[tuple[int, Mix], tuple[int, Mix]]:
        """Reads, whose sectors may need further turns, and writes, which are not read back."""
        return (work.reads, self.head.reading(work.reading)), (work.writes, work.writing)

    def serve(self, span: Span, work: Work) -> tuple[Served, Served]:
        """Reads and writes share one arm: each waits for all, then takes its own time."""
        sorts, milliseconds = self._sorts(work), span.seconds * 1000.0
        if work.reads + work.writes <= FEW:
            return self._one_by_one(self.rng, sorts, milliseconds)
        costs = [(count, self.platters.service(mix)) for count, mix in sorts]
        reading, writing = queue.together(self.rng, milliseconds, costs, direct=work.direct)
        return reading, writing

    def _one_by_one(
        self, rng: Random, sorts: tuple[tuple[int, Mix], tuple[int, Mix]], span_ms: float
    ) -> tuple[Served, Served]:
        arrivals = sorted(
            (rng.random() * span_ms, place) for place, (count, _) in enumerate(sorts) for _ in range(count)
        )
        served = list(
            queue.one_by_one((at, self.platters.request_ms(rng, sorts[place][1])) for at, place in arrivals)
        )
        reading, writing = (
            queue.added(one for one, (_, of) in zip(served, arrivals, strict=True) if of == place)
            for place in (0, 1)
        )
        return reading, writing

    def age(self, span: Span, work: Work) -> None:
        """Defects where they lie, sectors that a weak head gives up, repairs."""
        self.surface.live(
            self.rng,
            0.0 if self.asleep else span.days,
            read=self._touched(work.reading, work.read_bytes * (1 - work.reading.cached)),
            written=self._touched(work.writing, work.write_bytes),
        )
        self.head.live(span.days)
        begin, end = work.reading.reach
        for _ in range(self.head.given_up(self.rng, work.reads * (1 - work.reading.cached))):
            unit = self.surface.layout.anywhere(self.rng, self.head.number, begin, end)
            self.surface.give_up(unit)
            self.timeouts += poisson(self.rng, _HANGS)
        self.worst_celsius = max(self.worst_celsius, self.celsius)

    def _touched(self, mix: Mix, amount: float) -> Touched:
        begin, end = mix.reach
        return Touched(begin=begin, end=end, amount=amount / self.spec.capacity)

    def first_bad(self) -> int | None:
        """A test stops at the first bad sector, noticed or not."""
        unit = self.surface.tested()
        return None if unit is None else unit * SECTORS

    def told(self) -> Told:
        """The attribute table of a plain drive."""
        surface, celsius = self.surface, self.celsius
        left = max(1, round(100 * surface.spare_share))
        rows = (
            Row(number=4, name="Start_Stop_Count", raw=self.cycles),
            Row(
                number=5,
                name="Reallocated_Sector_Ct",
                raw=surface.reallocated,
                value=left,
                worst=left,
                threshold=_SPARE_LIMIT,
                prefail=True,
            ),
            Row(number=9, name="Power_On_Hours", raw=self.hours),
            Row(number=10, name="Spin_Retry_Count", raw=self.spin_retries, threshold=97, prefail=True),
            Row(number=12, name="Power_Cycle_Count", raw=self.cycles),
            Row(number=187, name="Reported_Uncorrect", raw=surface.uncorrectable),
            Row(number=188, name="Command_Timeout", raw=self.timeouts),
            Row(number=192, name="Power-Off_Retract_Count", raw=self.retracts),
            Row(number=193, name="Load_Cycle_Count", raw=self.loads + self.cycles),
            Row(
                number=194,
                name="Temperature_Celsius",
                raw=celsius,
                value=max(1, 100 - celsius),
                worst=max(1, 100 - self.worst_celsius),
            ),
            Row(number=197, name="Current_Pending_Sector", raw=surface.pending),
            Row(number=198, name="Offline_Uncorrectable", raw=surface.unreadable_by_itself),
            Row(number=199, name="UDMA_CRC_Error_Count", raw=self.crc),
            Row(number=241, name="Total_LBAs_Written", raw=self.drive_written // 512),
            Row(number=242, name="Total_LBAs_Read", raw=self.drive_read // 512),
        )
        return Told(
            model=self.spec.model,
            serial=self.spec.serial,
            number=self.number,
            firmware=self.firmware,
            capacity=self.spec.capacity,
            rpm=self.spec.rpm,
            hours=self.hours,
            cycles=self.cycles,
            celsius=celsius,
            limit=self.limit,
            passed=left > _SPARE_LIMIT,
            rows=rows,
            log={},
            tests=self.tests,
        )
