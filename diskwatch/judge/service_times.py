"""Sentences about how long a drive's work takes at equal load; all others: `diskwatch.judge.sentences`."""

from collections.abc import Mapping
from math import exp

from diskwatch.units import once_in

_WORK: Mapping[str, tuple[str, str]] = {
    "read-latency": ("Reads take", "reads"),
    "write-latency": ("Writes take", "writes"),
}


def slower(
    signal: str,
    *,
    times: float,
    now_us: int | None,
    usual_us: int | None,
    tolerance: float,
    evidence: float,
    follows_heat: bool,
) -> str:
    """A ledger of latency alarmed.

    Args:
        signal: ``read-latency`` or ``write-latency``.
        times: how many times as long comparable work takes now.
        now_us: what an operation takes now at equal load, microseconds, or None.
        usual_us: what it usually took, or None.
        tolerance: slowness that still counts as sound, as a natural logarithm.
        evidence: M in days.
        follows_heat: whether slowness goes up and down with the drive's temperature.
    """
    measured = f" ({say_ms(now_us)}, usually {say_ms(usual_us)})" if now_us and usual_us else ""
    heat = " It is slow when it is warm: see to its cooling first." if follows_heat else ""
    return (
        f"{_WORK[signal][0]} {times:.2g} times as long at the same load as in its first weeks{measured}; "
        f"the norm is at most {exp(tolerance):.3g} times. "
        f"A drive within the norm would show this at most {once_in(evidence)} of watching.{heat}"
    )


def say_ms(microseconds: int) -> str:
    """A time in milliseconds, with two digits that count: ``0.18 ms``, ``8.2 ms``, ``120 ms``."""
    ms = microseconds / 1000
    return f"{ms:.0f} ms" if ms >= 10 else f"{ms:.1f} ms" if ms >= 1 else f"{ms:.2g} ms"


def times_anew(*, known: bool) -> str:
    """Usual times no longer hold, since the drive moved or its firmware is another."""
    if known:
        return (
            "It is back where it was before, with the same firmware: its usual service times from then hold "
            "again."
        )
    return (
        "Its usual service times are learnt anew, since its port or its firmware is another; a slowing under "
        "way would not show in them."
    )


def times_unknown() -> str:
    """Why there is no present time yet, as a reason beside a missing value."""
    return "what is usual for it at equal load is still being learnt"
