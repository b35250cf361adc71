"""Sentences about how long a drive's work takes at equal load; all others: `diskwatch.judge.sentences`."""

from collections.abc import Mapping
from math import exp

from diskwatch.judge.language import _, marked
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
