"""Values computed with scipy in our own study, where no other source stands beside them."""

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.exact import count_limits, share_limits


def test_three_of_sixty_four_lie_between_one_and_thirteen_per_cent():
    """Clopper-Pearson, 95 %."""
    assert share_limits(3, 64, 0.95) == pytest.approx((0.009773, 0.130936), abs=5e-7)


@pytest.mark.parametrize(
    ("count", "low", "high"),
    [
        (0, 0.0, 3.6888794541),
        (1, 0.0253178080, 5.5716433909),
        (2, 0.2422092785, 7.2246876677),
        (3, 0.618672, 8.767273),
        (5, 1.6234863901, 11.6683320793),
        (10, 4.7953886961, 18.3903560420),
        (27, 17.7931701318, 39.2835824452),
    ],
)
def test_the_limits_of_a_count_are_garwoods(count, low, high):
    assert count_limits(count, 0.95) == pytest.approx((low, high), abs=5e-7)


@pytest.mark.parametrize(
    ("failures", "hours", "probability", "mtbf"),
    [
        (4, 1500, 0.9, 163.8714024229),
        (2, 1600, 0.9, 254.1379365489),
        (0, 1000, 0.9, 333.8082006953),
        (10, 1500, 0.8, 97.3606111323),
        # One-sided 90 %: half of what a two-sided 80 % misses.
        (2, 1600, 0.8, 300.6207628328),
        (0, 1000, 0.8, 434.2944819033),
    ],
)
def test_the_lower_bound_of_the_mean_time_between_failures_is_that_of_the_chi_square(
    failures, hours, probability, mtbf
):
    """Time-terminated test of constant rate, as the NIST/SEMATECH e-Handbook 8.4.5 treats it (from memory)."""
    assert hours / count_limits(failures, probability)[1] == pytest.approx(mtbf, rel=1e-9)


@given(tries=st.integers(1, 400), share=st.floats(0, 1), probability=st.floats(0.5, 0.99))
def test_the_limits_hold_the_share_seen_and_mirror_with_its_rest(tries, share, probability):
    hits = round(share * tries)
    low, high = share_limits(hits, tries, probability)
    assert 0 <= low <= hits / tries <= high <= 1
    mirrored = share_limits(tries - hits, tries, probability)
    assert (1 - mirrored[1], 1 - mirrored[0]) == pytest.approx((low, high), abs=1e-9)


@given(count=st.integers(0, 500), probability=st.floats(0.5, 0.99))
def test_more_counted_never_lowers_a_limit(count, probability):
    low, high = count_limits(count, probability)
    above = count_limits(count + 1, probability)
    assert low < count + 1e-9 < high
    assert above[0] > low
    assert above[1] > high


def test_what_is_no_share_or_count_is_refused():
    for hits, tries in ((3, 2), (-1, 2), (0, 0)):
        with pytest.raises(ValueError, match="no share"):
            share_limits(hits, tries)
    with pytest.raises(ValueError, match="no count"):
        count_limits(-1)
