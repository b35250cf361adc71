"""What a screen or a list shows of all drives at one moment."""

from dataclasses import dataclass, field

from diskwatch.records.drive import Drive, Place
from diskwatch.records.forecast import Forecast
from diskwatch.records.io import IoSpan
from diskwatch.records.judgement import Call, Finding
from diskwatch.records.owner import OwnerFacts
from diskwatch.records.reading import Outcome


@dataclass(frozen=True, slots=True, kw_only=True)
class SignalNow:
    """One signal as last read.

    Attributes:
        name: the signal.
        value: its value in ``unit``, or None where not known.
        unit: its unit.
        since: when it was first seen at this value, UTC seconds since 1970.
        evidence: M in days; None where no ledger follows it.
    """

    name: str
    value: int | str | None
    unit: str
    since: int
    evidence: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class LastPass:
    """How the last pass over a drive ended.

    Attributes:
        at: when, UTC seconds since 1970.
        outcome: how.
        explanation: one sentence of why; None where it was read.
    """

    at: int
    outcome: Outcome
    explanation: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class DriveLine:
    """One drive with all that is known of it now.

    Attributes:
        number: its number in the history.
        drive: who it is.
        place: where it is.
        label: the owner's name for it, or None.
        first_seen: when it was first seen, UTC seconds since 1970.
        last_pass: how the last pass ended; None before the first.
        call: what to do; None until first read.
        findings: what stands now, leading one first.
        signals: its signals as last read, by name.
        traffic: its traffic over the last span, or None where nobody measures it now.
        left_out: why the watch did not ask it in its last round, one sentence; None where it did, or
            where nobody watches.
        owner: what the owner has said of it besides.
        forecasts: the latest forecast of each of its signals that moves towards a limit.
    """

    number: int
    drive: Drive
    place: Place
    label: str | None
    first_seen: int
    last_pass: LastPass | None
    call: Call | None
    findings: tuple[Finding, ...] = ()
    signals: tuple[SignalNow, ...] = ()
    traffic: IoSpan | None = None
    left_out: str | None = None
    owner: OwnerFacts = field(default_factory=OwnerFacts)
    forecasts: tuple[Forecast, ...] = ()

    @property
    def departed(self) -> bool:
        """Whether another drive has taken its place and it was not met since; met again it is back at once."""
        said, last = self.owner.replaced_at, self.last_pass
        return said is not None and (last is None or last.outcome is Outcome.ABSENT or last.at <= said)

    @property
    def name(self) -> str:
        """What a person calls it: the owner's label, else its model, else its device."""
        return self.label or self.drive.identity.model or self.place.device


@dataclass(frozen=True, slots=True, kw_only=True)
class Bays:
    """All drives at one moment.

    Attributes:
        at: the moment, UTC seconds since 1970.
        watcher: process number of whoever watches now; None where nobody does.
        drives: worst call first.
        trouble: what keeps the watch from doing its work, one sentence each.
        departed: drives whose place another one has taken (`DriveLine.departed`): they ask for nothing more.
    """

    at: int
    watcher: int | None
    drives: tuple[DriveLine, ...]
    trouble: tuple[str, ...] = ()
    departed: tuple[DriveLine, ...] = ()

    @property
    def every(self) -> tuple[DriveLine, ...]:
        """All drives that the history knows, those that departed last."""
        return (*self.drives, *self.departed)
