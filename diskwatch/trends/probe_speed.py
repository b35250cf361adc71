"""The probe's speed: a disk that became slower all over, seen free of any load.

The mean time of a probe day's band reads, held against the median of the drive's first 15 probe days. Like the
ledger of latency (`diskwatch.trends.slowness`), whose recursion and whose assumption it shares, but with a
tolerance of 5 % only, since no workload is in the way. (Method and constants: our own study.)
"""

from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from math import isfinite, log

from diskwatch.trends import ledger as ledgers
from diskwatch.trends.ledger import Ledger
from diskwatch.trends.middle import median, scaled_mad
from diskwatch.trends.norms import BUDGET
from diskwatch.trends.slowness import SUSPICIONS, factors

LEARNING = 15
"""Probe days that the reference and its spread are learnt from."""

LEAST_READS = 32
TOLERANCE = log(1.05)
"""Slowness that still counts as sound, as a natural logarithm (a proposal; no source)."""

SHARE = 0.04
"""Part of the budget of one false drift alarm in ten years (`diskwatch.trends.norms`)."""

THRESHOLD = BUDGET / SHARE
"""Evidence in days at which the probe's speed alarms."""

_LEAST_SPREAD = 0.05
_CUT_TURNS = 4.0
_CUT_MEDIANS = 4.0


@dataclass(frozen=True, slots=True, kw_only=True)
class ProbeSpeed:
    """The probe's speed through time; plain values, complete for a restart.

    Attributes:
        first: natural logarithms of the first days' mean times in milliseconds.
        reference: their median; None until learnt.
        sigma: their spread; None until learnt.
        ledger: evidence so far.
        latest: the latest day beyond the reference, as a natural logarithm; None before there is one.
    """

    first: tuple[float, ...] = ()
    reference: float | None = None
    sigma: float | None = None
    ledger: Ledger = field(default_factory=lambda: ledgers.empty(len(SUSPICIONS)))
    latest: float | None = None


def after_day(state: ProbeSpeed, times_ms: Iterable[float], *, turn: float | None) -> ProbeSpeed:
    """Take in one probe day; one with fewer than 32 reads changes nothing.

    Each read is cut off at four turns, so that a few retries, which late reads are for, do not pass for
    slowness; without turns, at four times the day's median.

    Args:
        state: state before.
        times_ms: what each clean band read took, above 0; others are left out.
        turn: how long one turn takes, in milliseconds; None for a drive without turns.
    """
    times = [time for time in times_ms if time > 0]
    if len(times) < LEAST_READS:
        return state
    cut = _CUT_MEDIANS * median(times) if turn is None else _CUT_TURNS * turn
    mean = sum(min(time, cut) for time in times) / len(times)
    if not isfinite(mean):
        return state  # most reads of a drive without turns never came back: late reads tell that
    level = log(mean)
    if state.reference is None or state.sigma is None:
        first = (*state.first, level)
        if len(first) < LEARNING:
            return replace(state, first=first)
        return replace(state, first=first, reference=median(first), sigma=max(_LEAST_SPREAD, scaled_mad(first)))
    shift = level - state.reference
    return replace(
        state, ledger=ledgers.after(state.ledger, factors((shift - TOLERANCE) / state.sigma)), latest=shift
    )
