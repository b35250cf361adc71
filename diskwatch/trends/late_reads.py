"""Late reads of the probe: retries of a disk before any counter moves.

An inner retry of a rotating disk costs whole turns, but the wait for a sector is uniform over one turn, so only
time beyond the edge of what sound reads take shows a retry. Where that edge lies is learnt from the drive's own
first 3,000 clean reads in narrow bands. After that each probe day is a step of the evidence ledger
(`diskwatch.trends.ledger`): if x of n reads were late, the suspicion "q of all reads are late" has the factor
(q/p)^x ((1 - q)/(1 - p))^(n - x) against the norm p, one in a thousand. Capping x only lowers its mean. The
bound on false alarms rests on the background above the edge keeping within the norm: after 3,000 clean reads
it exceeds it with a chance of at most (1 - 0.001)^3000 = 5 %, and where it does, every drive alarms in time.
(Method and constants: our own study, on a model of a disk; no figure was measured on failing drives.)

A solid-state drive has no turns: its edge comes from its own baseline all the same, with no meaning attached.
"""

from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from math import isfinite

from diskwatch.trends import ledger as ledgers
from diskwatch.trends.exact import share_limits
from diskwatch.trends.ledger import Ledger
from diskwatch.trends.norms import BUDGET

NORM = 0.001
"""Share of late reads that still counts as sound (a proposal; no source)."""

RATIOS = (2.0, 5.0, 15.0, 50.0, 150.0)
"""The suspicions: reads are late this many times as often as the norm allows."""

SHARE = 0.12
"""Part of the budget of one false drift alarm in ten years (`diskwatch.trends.norms`)."""

THRESHOLD = BUDGET / SHARE
"""Evidence in days at which late reads alarm; the full one, not tightened."""

BASELINE = 3000
"""Clean reads that the edge is learnt from, about two weeks of 256 a day."""

SEEN = 0.875
"""Share of retried reads that end beyond the edge in a narrow band (a geometric number of turns, half each)."""

_ABOVE_LARGEST, _ABOVE_USUAL = 0.5, 3.0  # ms
_TAIL = BASELINE // 100 + 1
_MOST_COUNTED = 4
_LARGEST_SHARE = 0.6


@dataclass(frozen=True, slots=True, kw_only=True)
class LateReads:
    """The probe's late reads through time; plain values, complete for a restart.

    Attributes:
        learnt: baseline reads seen so far.
        slowest: the slowest of them in milliseconds, slowest first: as many as the edge needs.
        limit_ms: the edge beyond which a read is late, in milliseconds; None until learnt.
        norm: share of late reads that still counts as sound.
        ledger: evidence so far.
        reads: reads judged since the evidence last began.
        late: how many of them were late.
    """

    learnt: int = 0
    slowest: tuple[float, ...] = ()
    limit_ms: float | None = None
    norm: float = NORM
    ledger: Ledger = field(default_factory=lambda: ledgers.empty(len(RATIOS)))
    reads: int = 0
    late: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class RetryRate:
    """How many of a disk's reads it had to retry.

    Attributes:
        rate: the estimate, a share of all reads.
        low: lower limit.
        high: upper limit.
        probability: of the limits, at least that.
    """

    rate: float
    low: float
    high: float
    probability: float


def after_day(
    state: LateReads, times_ms: Iterable[float], *, slice_requests: int = 0, slice_late: int = 0
) -> LateReads:
    """Take in one probe day.

    Args:
        state: state before.
        times_ms: what each clean band read took; one that never came back counts as infinite. Rounds that
            another program disturbed, or that woke the drive, must be left out by whoever read.
        slice_requests: requests of the day's slice (`diskwatch.trends.slices`), which the same norm holds for.
        slice_late: how many of them were late.
    """
    times = [time for time in times_ms if time >= 0]  # NaN goes the same way as a negative time
    if state.limit_ms is None:
        state = _learnt(state, times)
        reads, late = slice_requests, slice_late
    else:
        limit = state.limit_ms
        reads = len(times) + slice_requests
        late = sum(time > limit for time in times) + slice_late
    if reads == 0:
        return state
    return replace(
        state,
        ledger=ledgers.after(state.ledger, factors(reads, late, state.norm)),
        reads=state.reads + reads,
        late=state.late + late,
    )


def _learnt(state: LateReads, times: list[float]) -> LateReads:
    # A read that never came back teaches nothing of what sound ones take.
    taken = [time for time in times if isfinite(time)][: BASELINE - state.learnt]
    slowest = tuple(sorted((*state.slowest, *taken), reverse=True)[:_TAIL])
    learnt = state.learnt + len(taken)
    if learnt < BASELINE:
        return replace(state, learnt=learnt, slowest=slowest)
    # One stray among thousands must not push the edge far out: hence the second bound, from the 99 % quantile.
    limit = min(slowest[0] + _ABOVE_LARGEST, slowest[-1] + _ABOVE_USUAL)
    return replace(state, learnt=learnt, slowest=slowest, limit_ms=limit)


def factors(reads: int, late: int, norm: float = NORM) -> tuple[float, ...]:
    """The factors L_k of one probe day.

    Args:
        reads: how many there were.
        late: how many of them were late; more than four count as four, or where the norm lets several be late
            a day, as four times so many: one bad day says little more than that.
        norm: share of late reads that still counts as sound.

    Raises:
        ValueError: more were late than there were.
    """
    if not 0 <= late <= reads:
        raise ValueError(f"{late} late reads of {reads} cannot be")
    counted = min(late, max(_MOST_COUNTED, int(_MOST_COUNTED * reads * norm)))
    # A suspicion that would exceed what a share can be is as good as the largest that may be.
    suspicions = [min(ratio * norm, _LARGEST_SHARE) for ratio in RATIOS]
    return tuple((q / norm) ** counted * ((1 - q) / (1 - norm)) ** (reads - counted) for q in suspicions)


def retry_rate(reads: int, late: int, probability: float = 0.8) -> RetryRate:
    """What share of its reads a rotating disk retried, for display; reads of narrow bands only.

    Args:
        reads: band reads, at least 1.
        late: how many of them were late.
        probability: of the limits (Clopper and Pearson).

    Raises:
        ValueError: the counts do not fit.
    """
    low, high = (_retried(end) for end in share_limits(late, reads, probability))
    return RetryRate(rate=_retried(late / reads), low=low, high=high, probability=probability)


def _retried(late_share: float) -> float:
    return min(1.0, max(0.0, (late_share - NORM) / SEEN))


def accepted(state: LateReads) -> LateReads:
    """The state after the owner has taken note of an alarm: only a further worsening speaks again.

    The norm rises to the upper 90 % value of the share that was late since the evidence last began.
    """
    if state.reads == 0:
        return state
    norm = max(state.norm, min(share_limits(state.late, state.reads)[1], _LARGEST_SHARE / RATIOS[0]))
    return replace(state, norm=norm, ledger=ledgers.empty(len(RATIOS)), reads=0, late=0)
