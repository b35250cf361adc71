"""Sentences about how long a drive's work takes at equal load; all others: `diskwatch.judge.sentences`."""

from collections.abc import Mapping
from math import exp

from diskwatch.judge.language import _, marked
from diskwatch.trends.latency_now import LatencyNow
from diskwatch.units import once_in

_MEASURED: Mapping[str, str] = {
    "read-latency": marked(
        "Reads take {times} times as long at the same load as in its first weeks ({now}, usually {usual}); the "
        "norm is at most {norm} times. A drive within the norm would show this at most {once} of watching."
    ),
    "write-latency": marked(
        "Writes take {times} times as long at the same load as in its first weeks ({now}, usually {usual}); "
        "the norm is at most {norm} times. A drive within the norm would show this at most {once} of watching."
    ),
}


def slower(
    signal: str,
    *,
    times: float,
    now_us: int,
    usual_us: int,
    tolerance: float,
    evidence: float,
    follows_heat: bool,
) -> str:
    """A ledger of latency alarmed.

    Args:
        signal: ``read-latency`` or ``write-latency``.
        times: how many times as long comparable work takes now.
        now_us: what an operation takes now at equal load, microseconds.
        usual_us: what it usually took.
        tolerance: slowness that still counts as sound, as a natural logarithm.
        evidence: M in days.
        follows_heat: whether slowness goes up and down with the drive's temperature.
    """
    told = _(_MEASURED[signal]).format(
        times=f"{times:.2g}",
        now=say_ms(now_us),
        usual=say_ms(usual_us),
        norm=f"{exp(tolerance):.3g}",
        once=once_in(evidence),
    )
    if not follows_heat:
        return told
    return " ".join((told, _("It is slow when it is warm: see to its cooling first.")))


def say_ms(microseconds: int) -> str:
    """A time in milliseconds, with two digits that count: ``0.18 ms``, ``8.2 ms``, ``120 ms``."""
    ms = microseconds / 1000
    return _("{count} ms").format(count=f"{ms:.0f}" if ms >= 10 else f"{ms:.1f}" if ms >= 1 else f"{ms:.2g}")


def times_anew(*, known: bool) -> str:
    """Usual times no longer hold, since the drive moved or its firmware is another."""
    if known:
        return _("It is back at a port and firmware that it had before: its usual times from then hold again.")
    return _(
        "Its usual service times are learnt anew, since its port or its firmware is another; a slowing under "
        "way would not show in them."
    )


def times_lost() -> str:
    """What usual times were learnt from is damaged."""
    return _("What its usual service times were learnt from cannot be read; they are learnt anew.")


def times_unknown() -> str:
    """Why there is no present time yet, as a reason beside a missing value."""
    return _("what is usual for it at equal load is still being learnt")


_NOW: Mapping[str, str] = {
    "read-latency": marked(
        "Reads take {times} times as long as usual at the same load ({now}, usually {usual}), over {classes} "
        "classes of work and {days} days that could be compared; the norm is at most {norm} times: {once}, "
        "alarms at {alarm}."
    ),
    "write-latency": marked(
        "Writes take {times} times as long as usual at the same load ({now}, usually {usual}), over {classes} "
        "classes of work and {days} days that could be compared; the norm is at most {norm} times: {once}, "
        "alarms at {alarm}."
    ),
}

_LEARNING: Mapping[str, str] = {
    "read-latency": marked(
        "Reads: what is usual is still being learnt; {classes} classes of work are known, and {missing} more "
        "days that can be compared are needed."
    ),
    "write-latency": marked(
        "Writes: what is usual is still being learnt; {classes} classes of work are known, and {missing} more "
        "days that can be compared are needed."
    ),
}


def standing(signal: str, now: LatencyNow, alarms_at: float) -> str:
    """What a ledger of latency has come to.

    Args:
        signal: ``read-latency`` or ``write-latency``.
        now: what it has come to.
        alarms_at: M in days at which it alarms.
    """
    if now.evidence is None or now.times is None or now.now_us is None or now.usual_us is None:
        return _(_LEARNING[signal]).format(classes=now.classes, missing=now.missing)
    return _(_NOW[signal]).format(
        times=f"{now.times:.2g}",
        now=say_ms(now.now_us),
        usual=say_ms(now.usual_us),
        classes=now.classes,
        days=now.scored,
        norm=f"{exp(now.tolerance):.3g}",
        once=once_in(now.evidence),
        alarm=once_in(alarms_at),
    )


def with_heat(follows: bool | None) -> str:
    """Whether slowness goes with the drive's temperature.

    Args:
        follows: None where that cannot be told.
    """
    if follows is None:
        return _("Whether its times follow its temperature cannot be told yet (30 such days are needed).")
    if follows:
        return _("Its times follow its temperature: see to its cooling before anything else.")
    return _("Its times do not follow its temperature.")
