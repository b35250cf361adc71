from itertools import pairwise
from math import exp, log

import pytest
from hypothesis import given, strategies as st

from diskwatch.records import Direction
from diskwatch.trends import ledger
from diskwatch.trends.norms import NORMS
from diskwatch.trends.references import CLASS_DAYS
from diskwatch.trends.slowness import (
    KEPT,
    LEARNING,
    NOTHING,
    SHARES,
    SUSPICIONS,
    TOLERANCE,
    Slowness,
    accepted,
    after_day,
    factors,
    threshold,
)


def evidences(series):
    state = ledger.empty(len(SUSPICIONS))
    found = []
    for z in series:
        state = ledger.after(state, factors(z))
        found.append(state.evidence)
    return found


def test_six_days_of_the_greatest_slowness_that_counts():
    """Computed by two routes."""
    expected = [4.7551, 32.4060, 213.6529, 1482.8015, 10711.8905, 79408.3795]
    assert evidences([2.5] * 6) == pytest.approx(expected, abs=5e-5)


def test_five_mixed_days_one_of_them_clipped():
    """Computed by two routes."""
    assert evidences([0.4, -1, 2, 3, 1.2])[-1] == pytest.approx(35.6357, abs=5e-5)


def test_days_exactly_on_the_tolerance_never_end_beyond_a_limit():
    """The limit is the mean of x / (1 - x) with x = exp(-0.75 l^2); computed by two routes."""
    held = evidences([0.0] * 2000)
    assert held[29] == pytest.approx(4.194412, abs=5e-7)
    assert held[-1] == pytest.approx(4.667209, abs=5e-7)
    assert pytest.approx(4.667209, abs=5e-7) == NOTHING
    assert all(one <= later for one, later in pairwise(held))


@given(st.floats(-50, 50), st.floats(0, 50))
def test_a_slower_day_never_lowers_a_factor(z, more):
    assert all(one <= other for one, other in zip(factors(z), factors(z + more), strict=True))


def test_normal_days_at_the_tolerance_have_factors_of_mean_one_at_most():
    """Simpson's rule over the normal density with variance 1.5, the proxy that the bound allows for."""
    steps, width = 2000, 12 * 1.5**0.5
    grid = [-width + 2 * width * place / steps for place in range(steps + 1)]
    simpson = [1, *[4, 2] * (steps // 2 - 1), 4, 1]
    means = [0.0] * len(SUSPICIONS)
    for z, weight in zip(grid, simpson, strict=True):
        density = exp(-(z**2) / 3) / (3 * 3.141592653589793) ** 0.5 * weight * (2 * width / steps) / 3
        means = [mean + density * factor for mean, factor in zip(means, factors(z), strict=True)]
    assert all(mean < 1.0001 for mean in means)
    assert max(means) > 0.99


def test_the_thresholds_of_reads_and_writes_are_their_full_shares():
    assert threshold(Direction.READ) == pytest.approx(30437.5)
    assert threshold(Direction.WRITE) == pytest.approx(73050)


def test_the_shares_of_latency_fit_into_the_budget_with_those_of_the_counters():
    reserved_for_probe_temperature_and_the_unforeseen = 0.12 + 0.04 + 0.03 + 0.02
    counters = sum(norm.share for norm in NORMS)
    total = counters + sum(SHARES.values()) + reserved_for_probe_temperature_and_the_unforeseen
    assert total == pytest.approx(1)


def work(slower=0.0):
    """Two classes, twelve roll-ups each, about 2 and 8 ms times a factor given as a logarithm."""
    logs = {5: round(1000 * (log(2) + slower)), 40: round(1000 * (log(8) + slower))}
    return [(cls, logs[cls]) for cls in logs for _ in range(12)]


def lived(shifts, *, first_day=0):
    state, held = Slowness(), []
    for day, slower in enumerate(shifts, first_day):
        state, one = after_day(state, work(slower), day=day, direction=Direction.READ, temperature=None)
        held.append(one)
    return state, held


SETTLED = [0.0] * (CLASS_DAYS + LEARNING)


def test_evidence_begins_after_twelve_days_of_reference_and_twenty_scored_ones():
    state, held = lived(SETTLED[:-1])
    assert [one.shift is None for one in held] == [True] * CLASS_DAYS + [False] * (LEARNING - 1)
    assert state.evidence is None
    state, _ = lived(SETTLED)
    assert state.evidence == 0
    assert state.sigma == 0.08


def test_reads_that_take_twice_as_long_alarm_after_six_scored_days():
    state, _ = lived([*SETTLED, *[log(2)] * 5])
    assert state.evidence == pytest.approx(10711.8905, abs=5e-5)
    assert state.evidence < threshold(Direction.READ)
    state, _ = lived([*SETTLED, *[log(2)] * 6])
    assert state.evidence > threshold(Direction.WRITE)


@given(st.lists(st.floats(-0.5, log(1.14)), max_size=200))
def test_days_within_the_tolerance_never_bring_more_than_next_to_no_evidence(shifts):
    state, _ = lived([*SETTLED, *shifts])
    assert state.evidence <= NOTHING
    assert state.onset is None


def test_the_onset_is_the_first_day_since_there_was_last_no_evidence():
    state, _ = lived([*SETTLED, 0.0, 0.5, 0.5, -2.0, -2.0, 0.5, 0.5, 0.5])
    assert state.onset == len(SETTLED) + 5


def test_only_a_bounded_number_of_days_is_kept():
    state, held = lived([*SETTLED, *[0.01 * (day % 7) for day in range(300)]])
    assert state.recent == tuple(held[-KEPT:])
    assert len(state.first_shifts) == LEARNING
    assert state.scored == LEARNING + 300


def test_the_series_runs_forward_after_a_clock_was_set_back():
    state, _ = lived([*SETTLED, 0.5, 0.5, 0.5], first_day=5000)
    for day in (4000, 4001):
        state, _ = after_day(state, work(0.5), day=day, direction=Direction.READ, temperature=None)
    assert [one.day for one in state.recent] == [4000, 4001]
    assert state.onset == 4000


def test_after_the_owner_took_note_only_a_further_slowing_speaks():
    alarmed, _ = lived([*SETTLED, *[0.5] * 8])
    state = accepted(alarmed)
    assert state.evidence == 0
    assert state.onset is None
    assert state.tolerance == pytest.approx(0.5)
    assert state.references == alarmed.references
    same, further = state, state
    for day in range(100, 140):
        same, _ = after_day(same, work(0.5), day=day, direction=Direction.READ, temperature=None)
        further, _ = after_day(further, work(0.9), day=day, direction=Direction.READ, temperature=None)
    assert same.evidence is not None
    assert same.evidence < 5
    assert further.evidence is not None
    assert further.evidence > threshold(Direction.READ)


def test_taking_note_never_makes_the_test_stricter():
    quiet, _ = lived([*SETTLED, *[-0.3] * 8])
    assert accepted(quiet).tolerance == TOLERANCE
    assert accepted(Slowness()) == Slowness()
