"""What the ledgers that are no counters have come to: latency and temperature; and all ledgers together."""

from collections.abc import Iterator
from dataclasses import dataclass

from diskwatch.analyser.state import DriveState
from diskwatch.trends import late_reads, probe_speed, slowness, temperature
from diskwatch.trends.latency_now import SIGNALS, LatencyNow
from diskwatch.trends.norms import NORMS


@dataclass(frozen=True, slots=True, kw_only=True)
class Timing:
    """One direction of a drive's latency.

    Attributes:
        signal: ``read-latency`` or ``write-latency``.
        now: what it has come to.
        alarms_at: M in days at which it alarms.
        share: its part of the budget of false alarms.
    """

    signal: str
    now: LatencyNow
    alarms_at: float
    share: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Warm:
    """How warm a drive runs.

    Attributes:
        usual: highest of a usual day in its first weeks, degrees Celsius; None while that is being learnt.
        learnt_days: days that it was learnt from so far.
        days: M in days; None while the usual temperature is being learnt.
        alarms_at: M in days at which it alarms.
        share: its part of the budget of false alarms.
    """

    usual: float | None
    learnt_days: int
    days: float | None
    alarms_at: float
    share: float


def timings(state: DriveState) -> tuple[Timing, ...]:
    """Latency, one a direction; none before the first day of traffic."""
    return tuple(
        Timing(
            signal=signal,
            now=state.latency[signal],
            alarms_at=slowness.threshold(direction),
            share=slowness.SHARES[direction],
        )
        for direction, signal in SIGNALS.items()
        if signal in state.latency
    )


def warm(state: DriveState) -> Warm | None:
    """Temperature; None for a drive that tells none."""
    if not state.warmth:
        return None
    felt = state.temperature
    return Warm(
        usual=felt.usual,
        learnt_days=len(felt.first),
        days=None if felt.usual is None else felt.ledger.evidence,
        alarms_at=temperature.THRESHOLD,
        share=temperature.SHARE,
    )


def joint(state: DriveState) -> float:
    """The evidence of all ledgers together, M in days: their mean, weighted by their shares of the budget.

    It is valid under any dependence, since it is a mean and no product. It is shown and never alarms, so that
    the bound of the separate alarms stays what it is.
    """
    return sum(share * days for share, days in _shares(state))


def _shares(state: DriveState) -> Iterator[tuple[float, float]]:
    for norm in NORMS:
        if norm.stream in state.streams:
            yield norm.share, state.streams[norm.stream].ledger.evidence
    for direction, signal in SIGNALS.items():
        if signal in state.latency:
            yield slowness.SHARES[direction], state.latency[signal].evidence or 0.0
    if state.temperature.usual is not None:
        yield temperature.SHARE, state.temperature.ledger.evidence
    if state.probe is not None:
        yield late_reads.SHARE, state.probe.late.ledger.evidence
        yield probe_speed.SHARE, state.probe.speed.ledger.evidence
