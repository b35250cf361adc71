"""What the analyser would have said of recorded drives, and when."""

from collections.abc import Iterable
from dataclasses import dataclass

from diskwatch.records.judgement import Call, CallWord
from diskwatch.units import DAY

_WARNS = frozenset({CallWord.COPY, CallWord.RETIRE})


@dataclass(frozen=True, slots=True, kw_only=True)
class Drift:
    """A ledger's alarm, also where a call that stood already hid it.

    Attributes:
        at: when, UTC seconds since 1970.
        signal: the counter whose stream alarmed, of several the one that rose last.
        evidence: M in days.
    """

    at: int
    signal: str
    evidence: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ReplayedDrive:
    """One drive's recorded life, as judged.

    Attributes:
        serial: serial as recorded.
        model: model as recorded, or None.
        first: first day recorded, UTC seconds since 1970.
        last: last one; the day of failure of a drive that failed.
        failed: whether any of its rows says that it failed.
        rows: rows that were used.
        calls: changes of call, oldest first.
        drifts: alarms of its ledgers, oldest first.
    """

    serial: str
    model: str | None
    first: int
    last: int
    failed: bool
    rows: int
    calls: tuple[Call, ...]
    drifts: tuple[Drift, ...]

    @property
    def worst(self) -> CallWord | None:
        """The strongest call of its life; None where it was never read."""
        return max((call.word for call in self.calls), key=lambda word: word.rank, default=None)

    @property
    def warned_at(self) -> int | None:
        """When it first reached copy or retire, UTC seconds since 1970; None where it never did."""
        return next((call.at for call in self.calls if call.word in _WARNS), None)


@dataclass(frozen=True, slots=True, kw_only=True)
class ReplaySummary:
    """What became of all drives together.

    Attributes:
        drives: how many there were.
        failed: how many of them failed.
        warned_failed: failed ones that reached copy or retire.
        warned_sound: others that did.
        median_lead_days: median over the warned failed ones of the days from the first such call to the last
            day; None without any.
        drive_days: rows that were used.
        skipped: rows that were not.
    """

    drives: int
    failed: int
    warned_failed: int
    warned_sound: int
    median_lead_days: float | None
    drive_days: int
    skipped: int


def summed(drives: Iterable[ReplayedDrive], *, skipped: int) -> ReplaySummary:
    """Sum up a replay."""
    from statistics import median  # noqa: PLC0415 - it loads a lot, and every command has these records

    every = tuple(drives)
    leads = [
        (drive.last - drive.warned_at) / DAY for drive in every if drive.failed and drive.warned_at is not None
    ]
    warned = sum(drive.warned_at is not None for drive in every)
    return ReplaySummary(
        drives=len(every),
        failed=sum(drive.failed for drive in every),
        warned_failed=len(leads),
        warned_sound=warned - len(leads),
        median_lead_days=median(leads) if leads else None,
        drive_days=sum(drive.rows for drive in every),
        skipped=skipped,
    )
