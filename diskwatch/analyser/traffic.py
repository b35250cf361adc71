"""One day of a drive's traffic taken in: how long its work takes at equal load, and what that shows."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

import msgspec

from diskwatch.analyser.between import drifted
from diskwatch.analyser.state import DriveState
from diskwatch.judge import service_times
from diskwatch.records import (
    CallWord,
    Cause,
    Direction,
    Entry,
    Finding,
    FindingKind,
    IoRollup,
    SignalKind,
    Value,
)
from diskwatch.trends import latency as latencies, slowness
from diskwatch.trends.latency import Latency
from diskwatch.trends.latency_now import SIGNALS, LatencyNow, alarmed, latency_now
from diskwatch.trends.warmth import usual_on

UNIT = "microseconds"
SOURCE = "traffic at equal load"


@dataclass(frozen=True, slots=True, kw_only=True)
class TrafficStep:
    """What one day of traffic led to.

    Attributes:
        state: the drive's state after it.
        latency: all that its latency was learnt from.
        happened: what the day book should hold; without the drive's number, which is not known here.
    """

    state: DriveState
    latency: Latency
    happened: tuple[Entry, ...]


def take_in_traffic(
    state: DriveState, latency: Latency, rollups: Iterable[IoRollup], *, day: int, at: int, key: str
) -> TrafficStep:
    """Take in one day that is over.

    Args:
        state: the drive's state before it.
        latency: what its latency was learnt from so far.
        rollups: the day's traffic, oldest first.
        day: its UTC day number.
        at: now, UTC seconds since 1970.
        key: names the circumstances that usual times hold for, see `diskwatch.trends.latency.moved`.
    """
    latency, happened = _here(latency, key, at)
    for direction, signal in SIGNALS.items():
        if signal in state.latency and state.latency[signal].noted:
            latency = latencies.acknowledged(latency, direction)
    for one in rollups:
        latency = latencies.arrive(latency, one)
    latency, _ = latencies.close_day(latency, temperature=usual_on(state.warmth, day))
    now = {signal: latency_now(latency, direction) for direction, signal in SIGNALS.items()}
    found = [
        _drift(direction, now[signal], at)
        for direction, signal in SIGNALS.items()
        if alarmed(latency.of(direction), direction)
    ]
    after, told = drifted(replace(state, latency=now, traffic_through=day), found, at=at)
    return TrafficStep(state=after, latency=latency, happened=(*happened, *told))


def _here(latency: Latency, key: str, at: int) -> tuple[Latency, list[Entry]]:
    """Latency under the present circumstances, and what is to be told where these are new."""
    if key == latency.key:
        return latency, []
    learnt = latency.key and (latency.reads.references or latency.writes.references)
    known = any(one.key == key for one in latency.aside)
    told = (
        [Entry(at=at, drive=None, kind="moved", text=service_times.times_anew(known=known))] if learnt else []
    )
    return latencies.moved(latency, key), told


def _drift(direction: Direction, now: LatencyNow, at: int) -> Finding:
    signal = SIGNALS[direction]
    return Finding(
        name=f"drift:{signal}",
        kind=FindingKind.DRIFT,
        signals=(signal,),
        since=at,
        calls=CallWord.LOOK,
        cause=Cause.HEAT if now.follows_heat else Cause.UNCLEAR,
        evidence=now.evidence,
        sentence=service_times.slower(
            signal,
            times=now.times or 1.0,
            now_us=now.now_us or 0,
            usual_us=now.usual_us or 0,
            tolerance=now.tolerance,
            evidence=now.evidence or 0.0,
            follows_heat=bool(now.follows_heat),
        ),
        data={
            "stream": signal,
            "signal": signal,
            "times": now.times,
            "now_us": now.now_us,
            "usual_us": now.usual_us,
            "onset_day": now.onset,
            "follows_heat": now.follows_heat,
            "threshold": slowness.threshold(direction),
        },
    )


def noted(before: Mapping[str, LatencyNow], signals: Iterable[str]) -> Mapping[str, LatencyNow]:
    """Latency after the owner has taken note of its alarms: only a further slowing speaks again.

    Args:
        before: by signal.
        signals: those that the owner's word is about.
    """
    heard = {
        signal: replace(before[signal], noted=True, evidence=0.0)
        for signal in signals
        if signal in before and before[signal].evidence is not None
    }
    return {**before, **heard} if heard else before


def measured(state: DriveState) -> tuple[Value, ...]:
    """What operations take at equal load, as values beside those that a drive tells of itself."""
    return tuple(
        Value(
            signal=signal,
            value=now.now_us,
            unit=UNIT,
            kind=SignalKind.GAUGE,
            source=SOURCE,
            reason=None if now.now_us is not None else service_times.times_unknown(),
        )
        for signal, now in state.latency.items()
    )


def no_latency() -> Latency:
    """The latency of a drive whose traffic has not been seen."""
    return latencies.begin()


def dump_latency(latency: Latency) -> str:
    """What latency was learnt from as JSON text; floats come back to the same bits."""
    return msgspec.json.encode(latency).decode()


def load_latency(text: str) -> Latency:
    """The same from JSON text.

    Raises:
        ValueError: it is no such text.
    """
    return msgspec.json.decode(text, type=Latency)
