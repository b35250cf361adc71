"""What was said of one drive in the course of a rehearsal, and when."""

from dataclasses import dataclass, field

from diskwatch.records import Call, Drift, DriveRound, FindingKind, Forecast, Outcome, Reading, ReplayedDrive
from diskwatch.trends.norms import STREAM_OF
from diskwatch.units import day_number


@dataclass(frozen=True, slots=True, kw_only=True)
class Said:
    """A call as it stood at one pass; only where it or its cause was new.

    Attributes:
        at: when, UTC seconds since 1970.
        call: the call.
        changed: whether the call itself was new; False where only its cause was.
    """

    at: int
    call: Call
    changed: bool


@dataclass(slots=True, kw_only=True)
class Story:
    """One drive's story.

    Attributes:
        serial: its serial.
        model: its model.
        first: when it was first asked, UTC seconds since 1970; None before.
        last: when it was last read; None before.
        days: days on which at least one pass brought a reading.
        missed: passes that should have brought one and did not.
        failed: whether it died.
        said: changes of call and cause, oldest first.
        drifts: ledger alarms, oldest first.
        moved: error counters that ever rose, with their last value.
        forecasts: every forecast that said when, oldest first.
        reached: UTC day number on which each signal was first said to have reached its limit.
    """

    serial: str
    model: str
    first: int | None = None
    last: int | None = None
    days: int = 0
    missed: int = 0
    failed: bool = False
    said: list[Said] = field(default_factory=list)
    drifts: list[Drift] = field(default_factory=list)
    moved: dict[str, int] = field(default_factory=dict)
    forecasts: list[Forecast] = field(default_factory=list)
    reached: dict[str, int] = field(default_factory=dict)
    _latest: dict[str, int] = field(default_factory=dict)
    _alarmed: set[str] = field(default_factory=set)

    def take(self, one: DriveRound) -> None:
        """Take in the drive's part of a round."""
        at = one.pass_.at
        self.first = at if self.first is None else self.first
        if one.pass_.outcome is Outcome.READ and one.pass_.reading is not None:
            self.days += self.last is None or day_number(self.last) != day_number(at)
            self.last = at
            self._counters(one.pass_.reading)
        elif one.pass_.outcome is not Outcome.ASLEEP:
            self.missed += 1
        for finding in one.findings:
            if finding.kind is FindingKind.DRIFT and finding.name not in self._alarmed:
                self._alarmed.add(finding.name)
                signal = str(finding.data["signal"])
                self.drifts.append(Drift(at=at, signal=signal, evidence=finding.evidence or 0.0))
        for made in one.forecasts:
            self._foretell(made)
        if one.call is not None:
            self._say(at, one.call)

    def _foretell(self, made: Forecast) -> None:
        if not made.known:
            return
        self.forecasts.append(made)
        if made.high == 0:
            self.reached.setdefault(made.signal, made.made_on_day)

    def _counters(self, reading: Reading) -> None:
        for value in reading.values:
            if value.signal in STREAM_OF and isinstance(value.value, int):
                before = self._latest.get(value.signal)
                if before is not None and value.value > before:
                    self.moved[value.signal] = value.value
                self._latest[value.signal] = value.value

    def _say(self, at: int, call: Call) -> None:
        before = self.said[-1].call if self.said else None
        changed = before is None or before.word is not call.word
        if changed or (before is not None and before.cause is not call.cause):
            self.said.append(Said(at=at, call=call, changed=changed))

    @property
    def told(self) -> ReplayedDrive | None:
        """The story as a replay tells it; None where the drive was never there."""
        if self.first is None:
            return None
        return ReplayedDrive(
            serial=self.serial,
            model=self.model,
            first=self.first,
            last=self.first if self.last is None else self.last,
            failed=self.failed,
            rows=self.days,
            calls=tuple(one.call for one in self.said if one.changed),
            drifts=tuple(self.drifts),
        )
