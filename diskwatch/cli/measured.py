"""The part of ``why`` about what is measured day by day: latency, temperature, probes, forecasts, the bound."""

from collections.abc import Iterator

from diskwatch import analyser
from diskwatch.history.forecasts import Kept
from diskwatch.judge import bound_told, forecast_told, probe_told, service_times, warmth_told
from diskwatch.records import Forecast
from diskwatch.trends import late_reads, probe_speed
from diskwatch.units import DAY, day_number, rfc3339


def latency(why: analyser.Explanation) -> Iterator[str]:
    """How long work takes at equal load, one sentence a direction and one about heat."""
    for one in why.timings:
        yield service_times.standing(one.signal, one.now, one.alarms_at)
    told = [one.now.follows_heat for one in why.timings if one.now.evidence is not None]
    if told:
        known = [follows for follows in told if follows is not None]
        yield service_times.with_heat(any(known) if known else None)


def temperature(why: analyser.Explanation) -> Iterator[str]:
    """How warm it runs."""
    if why.warm is not None:
        warm = why.warm
        yield warmth_told.standing(
            usual=warm.usual, learnt_days=warm.learnt_days, days=warm.days, alarms_at=warm.alarms_at
        )


def probe(why: analyser.Explanation) -> Iterator[str]:
    """What its probes have come to."""
    if why.probe is not None:
        yield probe_told.late_standing(why.probe, late_reads.THRESHOLD)
        yield probe_told.speed_standing(why.probe, probe_speed.THRESHOLD)


def bound(why: analyser.Explanation) -> Iterator[str]:
    """What the bound on false alarms rests on, and what breaks it."""
    if not why.evidence and not why.timings and why.warm is None:
        return
    more = bool(why.timings) or why.warm is not None
    yield bound_told.joint(why.joint)
    yield from bound_told.rests_on(latency=more)
    if why.probe is not None:
        yield probe_told.rests_on()
    yield from bound_told.breaks(latency=more)


def forecasts(made: tuple[Forecast, ...], kept: tuple[Kept, ...], at: int) -> Iterator[str]:
    """Every forecast that stands, and how those before it fared.

    Args:
        made: the latest about each signal.
        kept: all of them.
        at: now, UTC seconds since 1970.
    """
    for one in made:
        yield forecast_told.forecast(one, at)
    told = forecast_told.fared([(one.forecast, one.reached) for one in kept], seen_until=day_number(at))
    if told is not None:
        yield told


def answer(why: analyser.Explanation, kept: tuple[Kept, ...], at: int) -> dict[str, object]:
    """The same as JSON, to stand among what ``why --json`` prints."""
    return {
        "latency": [
            {
                "signal": one.signal,
                "evidence": one.now.evidence,
                "alarms_at": one.alarms_at,
                "share": one.share,
                "times_as_long": one.now.times,
                "now_microseconds": one.now.now_us,
                "usual_microseconds": one.now.usual_us,
                "days_compared": one.now.scored,
                "days_missing": one.now.missing,
                "classes": one.now.classes,
                "follows_temperature": one.now.follows_heat,
            }
            for one in why.timings
        ],
        "temperature": None
        if why.warm is None
        else {
            "usual_celsius": why.warm.usual,
            "learnt_days": why.warm.learnt_days,
            "evidence": why.warm.days,
            "alarms_at": why.warm.alarms_at,
            "share": why.warm.share,
        },
        "probe": _probe(why),
        "joint_evidence": why.joint,
        "bound": list(bound(why)),
        "forecasts": [_forecast(one, at) for one in kept],
    }


def _probe(why: analyser.Explanation) -> dict[str, object] | None:
    if why.probe is None:
        return None
    late, speed = why.probe.late, why.probe.speed
    return {
        "probes": why.probe.days,
        "median_microseconds": why.probe.median_us,
        "reads_learnt": late.learnt,
        "reads_judged": late.reads,
        "late_reads": late.late,
        "late_beyond_ms": late.limit_ms,
        "late_norm": late.norm,
        "late_evidence": late.ledger.evidence if why.probe.judges_late else None,
        "late_alarms_at": late_reads.THRESHOLD,
        "late_share": late_reads.SHARE,
        "speed_shift": speed.latest,
        "speed_evidence": None if speed.latest is None else speed.ledger.evidence,
        "speed_alarms_at": probe_speed.THRESHOLD,
        "speed_share": probe_speed.SHARE,
    }


def _forecast(kept: Kept, at: int) -> dict[str, object]:
    made = kept.forecast
    return {
        "signal": made.signal,
        "limit": made.limit,
        "limit_from": made.limit_from.value,
        "made_on": rfc3339(made.made_on_day * DAY)[:10],
        "low_days": made.low,
        "high_days": made.high,
        "probability": made.probability,
        "reason": made.reason,
        "reached_on": None if kept.reached is None else rfc3339(kept.reached * DAY)[:10],
        "held": made.held(reached=kept.reached, seen_until=day_number(at)),
    }
