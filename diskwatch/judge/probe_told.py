"""Sentences about what the probe of a disk shows; all others: `diskwatch.judge.sentences`."""

from math import exp

from diskwatch.judge.language import _
from diskwatch.judge.service_times import say_ms
from diskwatch.trends.late_reads import BASELINE, SEEN, retry_rate
from diskwatch.trends.probe_speed import LEARNING, TOLERANCE
from diskwatch.trends.probed import Probed
from diskwatch.units import once_in, say_count


def late(*, late: int, reads: int, limit_ms: float, norm: float, evidence: float) -> str:
    """The ledger of late reads alarmed.

    Args:
        late: reads that were late.
        reads: all that were judged.
        limit_ms: the time beyond which a single read is late, milliseconds.
        norm: share of late reads that still counts as sound.
        evidence: M in days.
    """
    return _(
        "It has to read again what it should read at once, whole turns of the platter later: {late} of {reads} "
        "small reads of the probe were late (beyond {limit}); the norm is at most {norm} in a thousand. A "
        "drive within the norm would show this at most {once} of watching. No counter of its own need show it "
        "yet: see that a copy of its data is up to date."
    ).format(
        late=say_count(late),
        reads=say_count(reads),
        limit=say_ms(round(limit_ms * 1000)),
        norm=f"{norm * 1000:.2g}",
        once=once_in(evidence),
    )


def slower(*, shift: float, evidence: float) -> str:
    """The ledger of the probe's speed alarmed.

    Args:
        shift: natural logarithm of how many times as long reads took at the last probe as in the first weeks.
        evidence: M in days.
    """
    return _(
        "It has become slower by itself: with nothing else to do, small reads take {times} times as long as "
        "in its first weeks of probes; the norm is at most {norm} times. A drive within the norm would show "
        "this at most {once} of watching."
    ).format(times=f"{exp(shift):.3g}", norm=f"{exp(TOLERANCE):.3g}", once=once_in(evidence))


def late_unknown() -> str:
    """Why late reads are not counted yet, as a reason beside a missing value."""
    return _("how long its reads usually take is still being learnt")


def none_back() -> str:
    """Why there is no time of a read, as a reason beside a missing value."""
    return _("none of the last probe's reads came back")


def late_standing(now: Probed, alarms_at: float) -> str:
    """What the ledger of late reads has come to.

    Args:
        now: what the probes have come to.
        alarms_at: M in days at which it alarms.
    """
    state = now.late
    if state.limit_ms is None:
        return _(
            "Late reads: how long reads usually take is still being learnt, from {learnt} of {needed} reads."
        ).format(learnt=say_count(state.learnt), needed=say_count(BASELINE))
    told = _("Late reads: {late} of {reads} beyond {limit}: {once}, alarms at {alarm}.").format(
        late=say_count(state.late),
        reads=say_count(state.reads),
        limit=say_ms(round(state.limit_ms * 1000)),
        once=once_in(state.ledger.evidence),
        alarm=once_in(alarms_at),
    )
    if not state.reads:
        return told
    rate = retry_rate(state.reads, state.late)
    share = _(
        "So it retries about {rate} in a thousand of its reads ({percent} % interval: {low} to {high}), if a "
        "retried read is seen with a chance of {seen} %."
    ).format(
        rate=f"{rate.rate * 1000:.2g}",
        percent=f"{rate.probability:.0%}".rstrip("%"),
        low=f"{rate.low * 1000:.2g}",
        high=f"{rate.high * 1000:.2g}",
        seen=f"{SEEN * 100:g}",
    )
    return f"{told} {share}"


def speed_standing(now: Probed, alarms_at: float) -> str:
    """What the ledger of the probe's speed has come to.

    Args:
        now: what the probes have come to.
        alarms_at: M in days at which it alarms.
    """
    state = now.speed
    if state.latest is None:
        known = LEARNING if state.reference is not None else len(state.first)
        return _(
            "Speed without load: what is usual is still being learnt, from {days} of {needed} days."
        ).format(days=known, needed=LEARNING)
    return _(
        "Speed without load: reads take {times} times as long as in the first {days} probes: {once}, alarms at "
        "{alarm}."
    ).format(
        times=f"{exp(state.latest):.3g}",
        days=LEARNING,
        once=once_in(state.ledger.evidence),
        alarm=once_in(alarms_at),
    )


def rests_on() -> str:
    """What the bound rests on where a drive is probed."""
    return _(
        "Assumed, for the probe: while a drive keeps within the norm, no more than 1 in 1,000 of its reads "
        "come later than the slowest of its first 3,000, and its speed stays within 5 % of its first weeks. "
        "Measured on a model of a disk, on no failing drive."
    )
