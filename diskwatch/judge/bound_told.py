"""What the bound on false alarms rests on, and what breaks it: said wherever evidence is laid open."""

from diskwatch.judge.language import _
from diskwatch.units import once_in


def joint(days: float) -> str:
    """All ledgers of a drive together."""
    return _(
        "All ledgers of this drive together: {once}. It is the mean of their evidence by their shares of the "
        "budget; it is shown and never alarms."
    ).format(once=once_in(days))


def rests_on(*, latency: bool) -> tuple[str, ...]:
    """What is proved, what was computed, what is assumed, one sentence each.

    Args:
        latency: whether the drive has a ledger of latency or of temperature.
    """
    proved = _(
        "Proved, for counters at twice the thresholds in use, from one assumption alone: outside the seven "
        "powered days after an occasion, the chance of another on a powered day is at most that of the norm, "
        "whatever came before."
    )
    computed = _(
        "Computed, for the thresholds in use under the same assumption: evidence leaps past its threshold, "
        "which the proof leaves out."
    )
    if not latency:
        return proved, computed
    return (
        proved,
        computed,
        _(
            "Assumed, for latency and temperature: given the past, days lie on average at or below the norm, "
            "and scatter no more than allowed. For latency this was measured on invented disks: 0.19 alarms in "
            "ten years (standard error 0.07) where the work changes in ways that no counter shows."
        ),
    )


def breaks(*, latency: bool) -> tuple[str, ...]:
    """What breaks the bound, and what is never seen, one sentence each.

    Args:
        latency: as for `rests_on`.
    """
    counters = _(
        "Trouble that goes on for more than a week at a time, or that comes in seasons, raises more alarms "
        "than stated; each of them still says what happened."
    )
    if not latency:
        return (counters,)
    return (
        counters,
        _(
            "Work that changes within its class (longer ways of the arm, fewer hits in a cache) takes longer "
            "as on a slow drive: the alarm is then true, and the work is its cause."
        ),
        _(
            "A drive with one kind of work only, or with fewer than 10 busy five minutes a day, is never "
            "compared; slowness below about 25 % cannot be told from a change of work, and what was slow from "
            "the first day on counts as usual."
        ),
    )
