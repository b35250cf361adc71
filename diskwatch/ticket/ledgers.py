"""The ledgers: what each has come to, and the way there from a dated exact state, for anybody to check."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from math import isclose

from diskwatch.analyser import DriveState
from diskwatch.history.proof import Copy
from diskwatch.records import Finding, FindingKind, Pass
from diskwatch.ticket.part import Json, Part, at
from diskwatch.ticket.steps import Run, Step, Trace
from diskwatch.trends import ledger
from diskwatch.trends.episodes import ABSORBED, Stream
from diskwatch.trends.norms import NORMS, Norm
from diskwatch.units import DAY

FOLLOWED = frozenset({"power-on-hours", *(signal for norm in NORMS for signal in norm.signals)})
"""Signals that the ledgers of counters are made of."""

METHOD = "mixture of Shiryaev-Roberts statistics over episodes of a counter"
_NO_STATE = "What was learnt of this drive so far cannot be read, so its ledgers cannot be told."
_NO_WAY = "The readings of then are no longer kept in full, so the way to this evidence cannot be told."


@dataclass(frozen=True, slots=True, kw_only=True)
class Copies:
    """The dated exact copies of a drive's state.

    Attributes:
        made: the copies, oldest first.
        load: gives the state that one holds; None where it cannot be read.
        passes: gives the readings after one, or all.
        exact_from: from when on all passes are kept, UTC seconds since 1970.
    """

    made: Sequence[Copy]
    load: Callable[[Copy], DriveState | None]
    passes: Callable[[Copy | None], Iterable[Pass]]
    exact_from: int


def ledgers_part(state: DriveState | None, findings: Iterable[Finding], copies: Copies) -> Part:
    """Every ledger of a drive.

    Args:
        state: the analyser's present state, or None where it cannot be read.
        findings: what stands; each drift of a counter gets the way to its own evidence.
        copies: where a way may begin.
    """
    if state is None:
        return Part(value=None, reason=_NO_STATE)
    drifts = {
        str(one.data.get("stream")): one
        for one in findings
        if one.kind is FindingKind.DRIFT and one.evidence is not None
    }
    ways = _Ways(copies)
    return Part(
        value=[
            _told(norm, state, drifts.get(norm.stream), ways) for norm in NORMS if norm.stream in state.streams
        ]
    )


class _Ways:
    """Finds ways; what is read once is kept."""

    def __init__(self, copies: Copies) -> None:
        self._copies = copies
        self._states: dict[Copy, DriveState | None] = {}
        self._ended: dict[Copy | None, Trace] = {}

    def to_now(self, norm: Norm, state: DriveState) -> Run:
        """The way to the present; where none can be told, it begins and ends there."""
        goal = state.streams[norm.stream]
        for begun in self._copies.made[:-3:-1] or (None,):
            if begun is None or begun.at + 1 >= self._copies.exact_from:
                run = self._to_the_end(begun).run(norm.stream)
                if run is not None and run.end == goal:
                    return run
        return Run(at=state.last_at, start=goal, steps=(), end=goal)

    def to_finding(self, norm: Norm, finding: Finding, now: Run) -> Run | None:
        """The way to a finding's evidence; None where it can no longer be told."""
        if _shows(finding, now.end):
            return now
        begun = self._before(norm, finding)
        trace = Trace(self._start(begun))
        for pass_ in self._copies.passes(begun):
            trace.take(pass_)
            run = trace.run(norm.stream)
            if run is not None and _shows(finding, run.end):
                return run
            if run is not None and run.end.powered > _days(finding):
                break
        return None

    def _to_the_end(self, begun: Copy | None) -> Trace:
        if begun not in self._ended:
            trace = Trace(self._start(begun))
            for pass_ in self._copies.passes(begun):
                trace.take(pass_)
            self._ended[begun] = trace
        return self._ended[begun]

    def _start(self, begun: Copy | None) -> DriveState:
        return DriveState() if begun is None else self._state(begun) or DriveState()

    def _before(self, norm: Norm, finding: Finding) -> Copy | None:
        """The last copy before the finding last showed.

        Powered days only grow, but for where a ledger began anew: so the search goes back from the present, in
        ever longer leaps, and halves the last of them.
        """
        made, leap = self._copies.made, 1
        low, high = len(made) - 1, len(made)
        while low >= 0 and not self._is_before(norm, made[low], finding):
            low, high, leap = low - leap, low, leap * 2
        low = max(low, -1)
        while high - low > 1:
            middle = (low + high) // 2
            if self._is_before(norm, made[middle], finding):
                low = middle
            else:
                high = middle
        return made[low] if low >= 0 else None

    def _is_before(self, norm: Norm, copy: Copy, finding: Finding) -> bool:
        state = self._state(copy)
        stream = None if state is None else state.streams.get(norm.stream)
        return stream is None or stream.powered + stream.exposure < _days(finding)

    def _state(self, when: Copy) -> DriveState | None:
        if when not in self._states:
            self._states[when] = self._copies.load(when)
        return self._states[when]


def _days(finding: Finding) -> float:
    days = finding.data.get("days")
    return float(days) if isinstance(days, int | float) else 0.0


def _shows(finding: Finding, stream: Stream) -> bool:
    """Whether a stream is as it was when a finding last showed."""
    evidence = stream.ledger.evidence
    return finding.evidence is not None and isclose(evidence, finding.evidence, rel_tol=1e-12)


def _told(norm: Norm, state: DriveState, drift: Finding | None, ways: _Ways) -> Json:
    now = ways.to_now(norm, state)
    way = None if drift is None else ways.to_finding(norm, drift, now)
    told_ways = [_way("now", now)]
    if drift is not None and way is not None:
        told_ways.append(_way(drift.name, way))
    stream = state.streams[norm.stream]
    return {
        "stream": norm.stream,
        "signals": [signal for signal in norm.signals if signal in state.latest],
        "method": METHOD,
        "norm_per_year": norm.per_year,
        "norm_per_day": norm.per_day,
        "share": norm.share,
        "alarms_at_days": norm.threshold,
        "guaranteed_at_days": norm.guaranteed,
        "ratios": list(ledger.RATIOS),
        "cap": ledger.CAP,
        "absorbed_days": ABSORBED,
        "evidence_days": stream.ledger.evidence,
        "episodes": stream.episodes,
        "powered_days": stream.powered + stream.exposure,
        "ways": told_ways,
        "way_unknown": _NO_WAY if drift is not None and way is None else None,
    }


def _way(of: str, run: Run) -> Json:
    stream = run.start
    return {
        "of": of,
        "from": at(run.at),
        "day": at(stream.day * DAY),
        "sums": list(stream.ledger.sums),
        "exposure": stream.exposure,
        "absorbing": stream.absorbing,
        "decided": stream.decided,
        "opened": stream.decided and stream.last_episode == stream.day,
        "steps": [_step(one) for one in run.steps],
        "evidence_days": run.end.ledger.evidence,
    }


def _step(step: Step) -> Json:
    return {"day": at(step.day * DAY), "exposure": step.exposure, "rose": step.rose, "days": step.days}
