"""One probe of a disk taken in: reads that it had to try again, and how fast it is free of any load."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from diskwatch.analyser.between import drifted
from diskwatch.analyser.state import DriveState
from diskwatch.judge import probe_told
from diskwatch.records import CallWord, Cause, Entry, Finding, FindingKind, ProbeDay, SignalKind, Value
from diskwatch.trends import late_reads, probe_speed, probed
from diskwatch.trends.probed import Probed

SOURCE = "probe"


@dataclass(frozen=True, slots=True, kw_only=True)
class ProbeStep:
    """What one probe led to.

    Attributes:
        state: the drive's state after it.
        happened: what the day book should hold; without the drive's number, which is not known here.
    """

    state: DriveState
    happened: tuple[Entry, ...]


def take_in_probe(state: DriveState, day: ProbeDay, *, rotation_rpm: int) -> ProbeStep:
    """Take in one probe; the last one once more changes nothing.

    Args:
        state: the drive's state before it.
        day: what it brought.
        rotation_rpm: how many turns a minute the disk makes, above 0.
    """
    if state.probe is not None and day.at == state.probe.at:
        return ProbeStep(state=state, happened=())
    now = probed.after(state.probe, day, rotation_rpm=rotation_rpm)
    after, happened = drifted(replace(state, probe=now), _drifts(now), at=day.at)
    return ProbeStep(state=after, happened=happened)


def _drifts(now: Probed) -> Iterator[Finding]:
    late, speed = now.late, now.speed
    if late.limit_ms is not None and late.ledger.evidence >= late_reads.THRESHOLD:
        yield _drift(
            "late-reads",
            now.at,
            evidence=late.ledger.evidence,
            threshold=late_reads.THRESHOLD,
            sentence=probe_told.late(
                late=late.late,
                reads=late.reads,
                limit_ms=late.limit_ms,
                norm=late.norm,
                evidence=late.ledger.evidence,
            ),
            late=late.late,
            reads=late.reads,
            limit_ms=late.limit_ms,
            norm=late.norm,
        )
    if speed.latest is not None and speed.ledger.evidence >= probe_speed.THRESHOLD:
        yield _drift(
            "probe-latency",
            now.at,
            evidence=speed.ledger.evidence,
            threshold=probe_speed.THRESHOLD,
            sentence=probe_told.slower(shift=speed.latest, evidence=speed.ledger.evidence),
            shift=speed.latest,
        )


def _drift(signal: str, at: int, *, evidence: float, threshold: float, sentence: str, **data: float) -> Finding:
    return Finding(
        name=f"drift:{signal}",
        kind=FindingKind.DRIFT,
        signals=(signal,),
        since=at,
        calls=CallWord.LOOK,
        cause=Cause.UNCLEAR,
        evidence=evidence,
        sentence=sentence,
        data={"stream": signal, "signal": signal, "threshold": threshold, **data},
    )


def probe_values(state: DriveState) -> tuple[Value, ...]:
    """What probes tell of a drive, as values beside those that it tells of itself; none without a probe."""
    now = state.probe
    if now is None:
        return ()
    return (
        Value(
            signal="late-reads",
            value=now.late.late if now.judges_late else None,
            unit="reads",
            kind=SignalKind.GAUGE,  # the owner's word lets it begin anew
            source=SOURCE,
            reason=None if now.judges_late else probe_told.late_unknown(),
        ),
        Value(
            signal="probe-latency",
            value=now.median_us,
            unit="microseconds",
            kind=SignalKind.GAUGE,
            source=SOURCE,
            reason=None if now.median_us is not None else probe_told.none_back(),
        ),
    )
