"""What one round of the watch wants stored, all of it or nothing."""

from collections.abc import Mapping
from dataclasses import dataclass, field

from diskwatch.records.daybook import Entry
from diskwatch.records.drive import Drive, Place
from diskwatch.records.forecast import Forecast
from diskwatch.records.judgement import Call, Finding
from diskwatch.records.probe import ProbeDay
from diskwatch.records.reading import Pass
from diskwatch.records.way import Way


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownDrive:
    """A drive that the history knows.

    Attributes:
        number: its number in the history, never reused.
        drive: the drive as it last described itself.
        place: where it was last seen.
        first_seen: when it was first seen, UTC seconds since 1970.
    """

    number: int
    drive: Drive
    place: Place
    first_seen: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Learnt:
    """What a drive's latency was learnt from; it is large and moves once a day.

    Attributes:
        through: the last UTC day number whose traffic is in it.
        state: as text, see `diskwatch.trends.latency`.
    """

    through: int
    state: str


@dataclass(frozen=True, slots=True, kw_only=True)
class DriveRound:
    """One drive's part of a round.

    Attributes:
        known: the drive and its place, as now known.
        pass_: how asking it went.
        state: the analyser's state after this pass, as text; None where the pass did not move it.
        findings: everything that stands now; what stood before and is not here has ended.
        evidence: M in days a signal, for signals that a ledger follows.
        call: the call that stands now; None until the drive has been read.
        learnt: what its latency was learnt from; None where no day of traffic was taken in.
        forecasts: what is to be expected of it, where that was worked out anew.
        probe: the probe of it that was taken in before the pass; None for none.
    """

    known: KnownDrive
    pass_: Pass
    state: str | None
    findings: tuple[Finding, ...] = ()
    evidence: Mapping[str, float] = field(default_factory=dict)
    call: Call | None = None
    learnt: Learnt | None = None
    forecasts: tuple[Forecast, ...] = ()
    probe: ProbeDay | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Round:
    """One round of the watch, or a part of one where a slow drive came later.

    Attributes:
        at: when it was judged, UTC seconds since 1970.
        drives: one a drive asked.
        entries: what happened, for the day book.
        ways: what was found out of USB adapters; it belongs to the machine and to no drive.
    """

    at: int
    drives: tuple[DriveRound, ...]
    entries: tuple[Entry, ...] = ()
    ways: tuple[Way, ...] = ()
