"""All that a drive's probes have come to: late reads, slices, and speed free of load.

A day's probe goes into two ledgers, each with its own share of the budget: that of late reads
(`diskwatch.trends.late_reads`), which the slice of the day serves too, and that of the probe's speed
(`diskwatch.trends.probe_speed`).

One request of a slice tests 64 units of the surface, so that a share of retried units that is quite usual may
exceed the norm of late requests, and then every drive alarms in time. Slices therefore count only once 3,000
requests in a row have come without a late one: a drive beyond the norm does so with a chance of at most
(1 - 0.001)^3000 = 5 % in any such row, and one at three times the norm not within a life of daily probes.
"""

from dataclasses import dataclass, field, replace
from math import inf

from diskwatch.records import ProbeDay
from diskwatch.trends import late_reads, probe_speed
from diskwatch.trends.late_reads import BASELINE, LateReads
from diskwatch.trends.middle import median
from diskwatch.trends.probe_speed import ProbeSpeed
from diskwatch.trends.slices import late_requests, turn_ms
from diskwatch.units import day_number

SIGNALS = ("late-reads", "probe-latency")
"""What the two ledgers are called among a drive's signals."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Probed:
    """A drive's probes through time; plain values, complete for a restart.

    Attributes:
        at: when the last one ended, UTC seconds since 1970.
        days: how many of them brought reads that could be judged.
        late: the ledger of late reads.
        speed: the ledger of the probe's speed.
        median_us: the median read of the last probe, microseconds; None where none came back.
        slice_run: requests of slices that came in a row without a late one, up to as many as are asked for.
    """

    at: int
    days: int = 0
    late: LateReads = field(default_factory=LateReads)
    speed: ProbeSpeed = field(default_factory=ProbeSpeed)
    median_us: int | None = None
    slice_run: int = 0

    @property
    def on(self) -> int:
        """UTC day number of the last probe."""
        return day_number(self.at)

    @property
    def judges_late(self) -> bool:
        """Whether late reads are judged by now; the first weeks are for learning."""
        return self.late.limit_ms is not None


def after(before: Probed | None, day: ProbeDay, *, rotation_rpm: int) -> Probed:
    """Take in one probe.

    Args:
        before: what the probes before came to; None at the first.
        day: what it brought.
        rotation_rpm: how many turns a minute the disk makes, above 0.
    """
    old = before or Probed(at=day.at)
    turn = turn_ms(rotation_rpm)
    times = [_ms(one) for one in day.band_us]
    sliced = [_ms(one) for one in day.slice_us]
    behind = len(late_requests(sliced, turn=turn))
    counts = old.slice_run >= BASELINE
    late = late_reads.after_day(
        old.late, times, slice_requests=len(sliced) if counts else 0, slice_late=behind if counts else 0
    )
    speed = probe_speed.after_day(old.speed, times, turn=turn)
    back = [one for one in day.band_us if one is not None]
    return Probed(
        at=day.at,
        days=old.days + bool(day.band_us),
        # What they were learnt from has served its purpose, and every pass rewrites the state.
        late=replace(late, slowest=()) if late.limit_ms is not None else late,
        speed=replace(speed, first=()) if speed.reference is not None else speed,
        median_us=round(median(back)) if back else None if day.band_us else old.median_us,
        slice_run=_run(old.slice_run, len(sliced), behind),
    )


def _ms(microseconds: int | None) -> float:
    return inf if microseconds is None else microseconds / 1000


def _run(before: int, requests: int, late: int) -> int:
    if before >= BASELINE:
        return before
    return 0 if late else min(BASELINE, before + requests)


def noted(before: Probed, *, late: bool, speed: bool) -> Probed:
    """The state after the owner has taken note of an alarm: only a further worsening speaks again.

    Args:
        before: the state.
        late: whether the word is about late reads; the norm rises to what was seen.
        speed: whether it is about the probe's speed; what is usual is learnt anew.
    """
    return replace(
        before,
        late=late_reads.accepted(before.late) if late else before.late,
        speed=ProbeSpeed() if speed else before.speed,
    )
