import math

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.histogram import HIGHEST, LOWEST, added, bin_of, histogram, middle, quantile

amounts = st.floats(0.001, 1e9)


@given(amounts)
def test_the_middle_of_a_bin_is_within_two_and_two_tenths_percent_of_what_is_in_it(amount):
    assert abs(middle(bin_of(amount)) / amount - 1) <= 0.0222


def test_sixteen_bins_make_an_octave_and_a_power_of_two_begins_one():
    assert [bin_of(2.0**k) for k in (-3, 0, 1, 5)] == [-48, 0, 16, 80]
    assert bin_of(math.nextafter(2.0, 0)) == 15


@pytest.mark.parametrize(
    ("amount", "bin_"), [(0, LOWEST), (1e-9, LOWEST), (1e30, HIGHEST), (math.inf, HIGHEST)]
)
def test_what_is_too_small_or_too_large_stands_in_the_outermost_bin(amount, bin_):
    assert bin_of(amount) == bin_


@pytest.mark.parametrize("amount", [-1.0, math.nan])
def test_what_is_no_amount_is_refused(amount):
    with pytest.raises(ValueError, match="at least 0"):
        bin_of(amount)


@given(st.lists(amounts), st.lists(amounts))
def test_two_histograms_added_are_the_histogram_of_all(one, other):
    assert added(histogram(one), histogram(other)) == histogram([*one, *other])


@given(st.lists(amounts, min_size=1), st.sampled_from([0.1, 0.3, 0.5, 0.9, 1.0]))
def test_a_quantile_is_within_half_a_bin_of_the_exact_one(values, share):
    exact = sorted(values)[math.ceil(share * len(values) - 1e-9) - 1]
    found = quantile(histogram(values), share)
    assert found is not None
    assert abs(found / exact - 1) <= 0.0222


def test_a_histogram_of_nothing_has_no_quantile():
    assert quantile({}, 0.5) is None


@pytest.mark.parametrize("share", [0, -0.1, 1.1])
def test_a_share_that_is_none_is_refused(share):
    with pytest.raises(ValueError, match="share"):
        quantile({0: 1}, share)
