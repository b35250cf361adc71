from math import comb, inf, nan
from random import Random

import msgspec
import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.trends import late_reads, ledger
from diskwatch.trends.late_reads import (
    BASELINE,
    NORM,
    THRESHOLD,
    LateReads,
    accepted,
    after_day,
    factors,
    retry_rate,
)
from tests.trends.populations import show
from tests.trends.probes import band_reads


def learnt(limit=10.0):
    return LateReads(learnt=BASELINE, slowest=(9.5,) * 31, limit_ms=limit)


def day(state, late, of=64):
    return after_day(state, [20.0] * late + [5.0] * (of - late))


def test_the_evidence_of_five_days_is_that_of_the_study():
    """64 reads a day, 0, 1, 0, 2, 3 of them late: 0.4314, 4.2766, 2.8991, 149.0724, 280898.573."""
    state, seen = learnt(), []
    for late in (0, 1, 0, 2, 3):
        state = day(state, late)
        seen.append(state.ledger.evidence)
    assert seen == pytest.approx([0.4314, 4.2766, 2.8991, 149.0724, 280898.573], abs=5.1e-5, rel=2e-9)
    assert (state.reads, state.late) == (320, 6)


@given(reads=st.integers(1, 300), share=st.floats(0, NORM))
def test_the_factors_of_a_drive_within_its_norm_have_a_mean_of_at_most_one(reads, share):
    """What the bound is proved from, the cap on what counts included."""
    means = [0.0] * len(late_reads.RATIOS)
    for late in range(min(reads, 40) + 1):
        chance = comb(reads, late) * share**late * (1 - share) ** (reads - late)
        for k, factor in enumerate(factors(reads, late)):
            means[k] += chance * factor
    assert all(mean <= 1 + 1e-9 for mean in means)


@given(reads=st.integers(4, 500), late=st.integers(0, 500))
def test_more_late_reads_never_lower_the_evidence(reads, late):
    late = min(late, reads - 1)
    assert all(more >= less for less, more in zip(factors(reads, late), factors(reads, late + 1), strict=True))


def test_the_edge_is_the_slowest_of_the_baseline_and_a_little():
    state = LateReads()
    times = [5 + k / 1000 for k in range(BASELINE)]
    for start in range(0, BASELINE, 250):
        assert state.limit_ms is None
        state = after_day(state, times[start : start + 250])
    assert state.limit_ms == pytest.approx(times[-1] + 0.5)


def test_one_stray_in_the_baseline_does_not_push_the_edge_far_out():
    times = [5.0] * 2970 + [9.0] * 29 + [400.0]
    assert after_day(LateReads(), times).limit_ms == pytest.approx(8.0)


def test_the_day_that_completes_the_baseline_is_not_judged_and_reads_without_an_end_teach_nothing():
    state = after_day(LateReads(), [5.0] * BASELINE + [500.0] * 9 + [inf] * 9)
    assert state.limit_ms == 5.5
    assert state.reads == 0
    assert after_day(LateReads(), [inf, nan, -1.0]).learnt == 0


def test_reads_that_never_came_back_are_late_and_those_without_a_time_do_not_count():
    state = after_day(learnt(), [inf, nan, -1.0, 5.0])
    assert (state.reads, state.late) == (2, 1)


def test_slices_count_before_and_beside_the_baseline():
    only = after_day(LateReads(), [], slice_requests=64, slice_late=2)
    assert only.ledger == day(learnt(), 2).ledger
    both = after_day(learnt(), [20.0] + [5.0] * 31, slice_requests=32, slice_late=1)
    assert both.ledger == day(learnt(), 2).ledger


def test_a_day_without_reads_changes_nothing():
    assert after_day(learnt(), []) == learnt()


def test_more_late_reads_than_reads_are_refused():
    with pytest.raises(ValueError, match="cannot be"):
        factors(3, 4)


def test_the_retry_rate_takes_off_the_background_and_adds_what_cannot_be_seen():
    found = retry_rate(700, 7)
    assert found.rate == pytest.approx((7 - 0.7) / (700 * 0.875))
    assert found.low < found.rate < found.high
    assert retry_rate(700, 0).rate == retry_rate(700, 0).low == 0


def test_an_accepted_rate_speaks_again_only_when_it_worsens():
    chance = Random(3)  # noqa: S311 - a simulation, seeded so that it repeats itself
    state = after_day(LateReads(), band_reads(chance, BASELINE))
    for _ in range(30):
        state = after_day(state, band_reads(chance, 256, retried=0.01))
    assert state.ledger.evidence > THRESHOLD
    state = accepted(state)
    assert 0.005 < state.norm < 0.02
    assert state.ledger == ledger.empty(len(late_reads.RATIOS))
    for _ in range(60):
        state = after_day(state, band_reads(chance, 256, retried=0.01))
    assert state.ledger.evidence < THRESHOLD
    for _ in range(14):
        state = after_day(state, band_reads(chance, 256, retried=0.06))
    assert state.ledger.evidence > THRESHOLD
    assert accepted(LateReads()) == LateReads()


@given(days=st.lists(st.lists(st.floats(0, 60), max_size=20), max_size=12))
def test_the_state_comes_back_from_text_to_the_same_bits_at_any_moment(days):
    live = saved = LateReads(learnt=BASELINE - 30, slowest=(9.0,))
    for times in days:
        live = after_day(live, times)
        saved = after_day(msgspec.json.decode(msgspec.json.encode(saved), type=LateReads), times)
    assert saved == live


@given(seed=st.integers(0, 10_000))
@settings(max_examples=8, deadline=None)
def test_one_per_cent_of_retries_is_found_within_a_fortnight(seed):
    chance = Random(seed)  # noqa: S311 - a simulation, seeded so that it repeats itself
    state = after_day(LateReads(), band_reads(chance, BASELINE))
    for _ in range(14):
        state = after_day(state, band_reads(chance, 256, retried=0.01))
    assert state.ledger.evidence > THRESHOLD


def delays(retried: float, drives: int) -> list[int]:
    chance = Random(8)  # noqa: S311 - a simulation, seeded so that it repeats itself
    found = []
    for _ in range(drives):
        state = after_day(LateReads(), band_reads(chance, BASELINE))
        days = 0
        while state.ledger.evidence < THRESHOLD and days < 365:
            state, days = after_day(state, band_reads(chance, 256, retried=retried)), days + 1
        found.append(days)
    return sorted(found)


@pytest.mark.bench
def test_the_delay_of_late_reads_is_that_of_the_study():
    """The study: 256 reads a day find 1 % of retries within 7 days in 90 of 100 cases ."""
    for retried in (0.005, 0.01, 0.05):
        found = delays(retried, 100)
        show(f"late reads, {retried:.1%} retried: median {found[50]} days, 90 % {found[90]} days")
    assert delays(0.01, 100)[90] <= 10
    sound = sum(days < 365 for days in delays(0.0, 60))
    show(f"late reads, sound: {sound} of 60 alarmed within a year")
    assert sound <= 1
