"""An invented hard disk: platters, a surface, heads."""

from random import Random

from diskwatch.records import Kind
from diskwatch.rehearsal import queue
from diskwatch.rehearsal.chance import poisson
from diskwatch.rehearsal.drive import InventedDrive, Span
from diskwatch.rehearsal.heat import Warmth
from diskwatch.rehearsal.link import Bay
from diskwatch.rehearsal.media import Surface
from diskwatch.rehearsal.queue import Served
from diskwatch.rehearsal.rotating import Mix, Platters
from diskwatch.rehearsal.scenario import DriveSpec
from diskwatch.rehearsal.told import Row, Told
from diskwatch.rehearsal.workload import Work, Workload

FEW = 60
"""Requests of a span that are served one by one."""

_SOUND_RETRIES = 0.0003
"""Share of reads that need a second turn on a sound drive (practice)."""

_SPARE_LIMIT = 36
"""Threshold of the replaced sectors' normalised value; makers set 5 to 140 (practice)."""


class Disk(InventedDrive):
    """A hard disk."""

    kind = Kind.HDD
    limit = 60

    def __init__(self, spec: DriveSpec, number: int, seed: int, bay: Bay, workload: Workload) -> None:
        """Make it as it was when it came into the machine."""
        self.platters = Platters(rpm=spec.rpm)
        self.surface = Surface(clusters=[], reallocated=spec.reallocated, pending=spec.pending)
        self.retried = _SOUND_RETRIES
        self.head_growth = 0.0
        self.spin_retries = 0
        self.retracts = spec.unsafe
        self.loads = spec.cycles * 3
        self.worst_celsius = 0
        super().__init__(spec, number, seed, bay, workload)

    def new_warmth(self) -> Warmth:
        """A disk takes half an hour to warm."""
        return Warmth(celsius=24.0, idle=15.0, load=8.0)

    def weaken_head(self, growth: float) -> None:
        """A head begins to read badly.

        Args:
            growth: by how much the logarithm of the share of retried reads grows a day.
        """
        self.head_growth = growth
        self.retried = max(self.retried, 0.004)

    def lose_power(self, times: int) -> None:
        """Heads retract in an emergency."""
        super().lose_power(times)
        self.retracts += times

    def can_do(self, span: Span, work: Work) -> float:
        """One arm serves all."""
        mean = self.platters.service(_with_retries(work.mix, self.retried)).mean_ms
        return queue.FULL * span.seconds * 1000 / ((work.reads + work.writes) * mean)

    def serve(self, span: Span, work: Work) -> tuple[Served, Served]:
        """Reads and writes share one arm: each waits for all."""
        mix = _with_retries(work.mix, self.retried)
        count, milliseconds = work.reads + work.writes, span.seconds * 1000
        if count == 0:
            return queue.NOTHING, queue.NOTHING
        if count <= FEW:
            served = queue.one_by_one(self._requests(self.rng, mix, count, milliseconds))
        else:
            service = self.platters.service(mix)
            served = queue.together(self.rng, count, milliseconds, service, direct=work.direct)
        share = work.reads / count
        return _part(served, share), _part(served, 1 - share)

    def _requests(self, rng: Random, mix: Mix, count: int, span_ms: float) -> list[tuple[float, float]]:
        arrivals = sorted(rng.random() * span_ms for _ in range(count))
        return [(arrival, self.platters.request_ms(rng, mix)) for arrival in arrivals]

    def age(self, span: Span, work: Work) -> None:
        """Defects, retries that grow, repairs."""
        self.surface.live(
            self.rng,
            0.0 if self.asleep else span.days,
            read_share=work.read_bytes / self.spec.capacity,
            written=work.writes > 0,
        )
        if self.head_growth:
            self.retried = min(0.5, self.retried * (1 + self.head_growth * span.days))
            # A head that needs many turns sooner or later gives a sector up.
            given_up = poisson(self.rng, max(0.0, self.retried - 0.05) * 4 * span.days)
            if given_up:
                self.surface.scratch(given_up, 0.0)
        self.worst_celsius = max(self.worst_celsius, round(self.warmth.celsius))

    def first_bad(self) -> int | None:
        """A test stops at the first bad sector, noticed or not."""
        surface = self.surface
        if not surface.latent and not surface.pending:
            return None
        return int(self.rng.random() * self.spec.capacity) // 512 // 8 * 8

    def told(self) -> Told:
        """The attribute table of a plain drive."""
        surface, celsius = self.surface, round(self.warmth.celsius)
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
            Row(number=198, name="Offline_Uncorrectable", raw=surface.scanned),
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


def _with_retries(mix: Mix, retried: float) -> Mix:
    return Mix(
        size=mix.size,
        sequential=mix.sequential,
        cached=mix.cached,
        stroke=mix.stroke,
        place=mix.place,
        retried=retried,
    )


def _part(served: Served, share: float) -> Served:
    return Served(total_ms=served.total_ms * share, busy_ms=served.busy_ms * share)
