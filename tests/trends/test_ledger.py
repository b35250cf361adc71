from itertools import product
from math import exp, expm1, isclose

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends import ledger
from diskwatch.trends.ledger import CAP, Ledger

EXPOSURES = st.floats(min_value=0.01, max_value=60)
NORMS = st.floats(min_value=0.1 / 365.25, max_value=12 / 365.25)


def test_the_expected_evidence_of_a_drive_at_its_norm_grows_by_one_a_step():
    """All 256 sequences enumerated: Bernoulli norm 0.2, suspicions 0.4 and 0.8, exactly 8 after 8 steps."""
    expected = 0.0
    for sequence in product((False, True), repeat=8):
        state, chance = ledger.empty(2), 1.0
        for error in sequence:
            factors = [q / 0.2 if error else (1 - q) / 0.8 for q in (0.4, 0.8)]
            state, chance = ledger.after(state, factors), chance * (0.2 if error else 0.8)
        expected += chance * state.evidence
    assert isclose(expected, 8, rel_tol=1e-12)


def test_the_factors_of_a_three_day_step_at_half_an_episode_a_year_and_twelvefold_suspicion():
    """Computed by two routes: 0.955831 quiet, 11.733170 with an episode."""
    quiet = ledger.count_factors(episode=False, exposure=3, norm_per_day=0.5 / 365.25)
    episode = ledger.count_factors(episode=True, exposure=3, norm_per_day=0.5 / 365.25)
    assert quiet[2] == pytest.approx(0.955831, abs=5e-7)
    assert episode[2] == pytest.approx(11.733170, abs=5e-7)


@given(exposure=EXPOSURES, norm=NORMS)
def test_each_factor_has_mean_one_exactly_at_the_norm(exposure, norm):
    """The likelihood ratio integrates to 1: what the bound on false alarms is proved from."""
    quiet = ledger.count_factors(episode=False, exposure=exposure, norm_per_day=norm)
    episode = ledger.count_factors(episode=True, exposure=exposure, norm_per_day=norm)
    for low, high in zip(quiet, episode, strict=True):
        assert exp(-norm * exposure) * low - expm1(-norm * exposure) * high == pytest.approx(1, rel=1e-9)


@given(days=st.integers(min_value=1, max_value=40), norm=NORMS, start=st.floats(0, 1e6))
def test_one_quiet_step_of_many_days_never_says_more_than_as_many_daily_ones(days, norm, start):
    begun = Ledger((start,) * 6)
    at_once = ledger.after(begun, ledger.count_factors(episode=False, exposure=days, norm_per_day=norm), days)
    daily = begun
    for _ in range(days):
        daily = ledger.after(daily, ledger.count_factors(episode=False, exposure=1, norm_per_day=norm))
    assert at_once.evidence <= daily.evidence * (1 + 1e-12)


@given(
    steps=st.lists(st.booleans(), min_size=1, max_size=60),
    turned=st.integers(min_value=0, max_value=59),
    norm=NORMS,
)
def test_turning_a_quiet_step_into_an_episode_never_lowers_the_evidence(steps, turned, norm):
    worse = list(steps)
    worse[turned % len(steps)] = True
    mild, severe = ledger.empty(), ledger.empty()
    for before, after in zip(steps, worse, strict=True):
        mild = ledger.after(mild, ledger.count_factors(episode=before, exposure=1, norm_per_day=norm))
        severe = ledger.after(severe, ledger.count_factors(episode=after, exposure=1, norm_per_day=norm))
    assert severe.evidence >= mild.evidence


def test_evidence_is_capped_and_never_overflows():
    state = ledger.empty()
    for _ in range(400):
        state = ledger.after(state, ledger.count_factors(episode=True, exposure=1, norm_per_day=0.001))
    assert state.evidence == CAP


def test_a_step_without_exposure_is_refused():
    with pytest.raises(ValueError, match="exposure above 0"):
        ledger.after(ledger.empty(), (1.0,) * 6, 0)


def test_factors_for_other_suspicions_are_refused():
    with pytest.raises(ValueError, match="zip"):
        ledger.after(ledger.empty(), (1.0,))
