from itertools import pairwise
from math import inf

import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.trends.robust import mann_kendall, theil_sen
from tests.trends.published import NILE, REPAIRS

VALUES = st.lists(st.integers(-50, 50), min_size=3, max_size=40)


def test_the_nile_falls():
    """S, its variance and z: pymannkendall, scipy and own arithmetic agree."""
    trend = mann_kendall(NILE)
    assert trend.s == -1387
    assert trend.variance == pytest.approx(112728.3333333333)
    assert trend.z == pytest.approx(-4.1280665228, abs=1e-9)
    assert trend.p == pytest.approx(3.658262922e-05, rel=1e-9)


def test_the_nile_falls_by_two_and_a_half_a_year():
    """Slope and 95 % limits by scipy and pymannkendall."""
    found = theil_sen(range(1871, 1971), NILE, 0.95)
    assert found.slope == pytest.approx(-2.6)
    assert (found.low, found.high) == pytest.approx((-3.627906977, -1.428571429))
    assert found.at_median == pytest.approx(5886.8)
    assert theil_sen(range(100), NILE).at_median == pytest.approx(1022.2)


def test_many_ties_are_taken_into_account():
    """An artificial count-like series; two libraries agree."""
    series = [0] * 20 + [1] * 5 + [3] * 4 + [3, 4, 4, 9, 9, 9, 12]
    trend = mann_kendall(series)
    assert trend.s == 416
    assert trend.variance == pytest.approx(4402)
    assert trend.z == pytest.approx(6.2549389845, abs=1e-9)
    assert trend.p == pytest.approx(3.976714513e-10, rel=1e-8)
    found = theil_sen(range(len(series)), series, 0.95)
    assert found.slope == pytest.approx(0.1318840580)
    assert (found.low, found.high) == pytest.approx((0.0666666667, 0.1904761905))


def test_the_worked_example_of_sen():
    """Sen (1968): slope 4.0, 93 % limits 3.71 and 4.38 (verified second hand, in scipy's own tests)."""
    found = theil_sen([1, 2, 3, 4, 10, 12, 18], [9, 15, 19, 20, 45, 55, 78], 0.93)
    assert found.slope == 4.0
    assert (found.low, found.high) == pytest.approx((3.71, 4.38), abs=0.005)
    assert found.at_median == 4.0


def test_gaps_between_the_places_are_no_hindrance():
    """Slope 0.1125, 80 % limits 0.1000 and 0.12222: scipy; median of 45 slopes."""
    x = [0, 1, 2, 5, 6, 9, 14, 15, 21, 30]
    found = theil_sen(x, [1.0, 1.1, 0.9, 1.6, 1.4, 1.9, 2.6, 2.2, 3.3, 4.4])
    assert found.slope == pytest.approx(0.1125)
    assert (found.low, found.high) == pytest.approx((0.1, 0.12222), abs=5e-6)


def test_a_short_rising_series():
    """Sen slope 0.35, S 37, z 3.21994, p 0.0012822: two packages."""
    y = [6.2, 5.1, 6.8, 7.0, 7.4, 6.9, 8.1, 8.0, 8.8, 9.3]
    trend = mann_kendall(y)
    assert theil_sen(range(1, 11), y).slope == pytest.approx(0.35)
    assert trend.s == 37
    assert trend.z == pytest.approx(3.21994, abs=5e-6)
    assert trend.p == pytest.approx(0.0012822, abs=5e-8)


def test_reversals_of_repair_times_follow_from_rises_and_falls():
    """33 of 45 pairs of times between repairs rise (NIST/SEMATECH 8.2.3.4, from memory; computed)."""
    between = [later - earlier for earlier, later in pairwise((0.0, *REPAIRS))]
    tied = 1  # both the second time and the sixth after it are 35 hours
    assert (45 - tied + mann_kendall(between).s) / 2 == 33


def test_twenty_one_values_without_ties_give_the_printed_z():
    """USGS SIR 2005-5275: S of -110 prints z -3.291 and p 0.0010 (verified second hand)."""
    # -110 of 210: 50 pairs rise and 160 fall: nine values rise to the front of a falling row.
    series = [-float(k) for k in range(21)]
    rises = 50
    for place in range(20, 0, -1):
        while rises and place and series[place - 1] > series[place]:
            series[place - 1], series[place] = series[place], series[place - 1]
            place, rises = place - 1, rises - 1  # noqa: PLW2901 - the value travels to the front
    trend = mann_kendall(series)
    assert trend.s == -110
    assert trend.variance == pytest.approx(1096.667, abs=0.001)
    assert trend.z == pytest.approx(-3.291, abs=0.0005)
    assert trend.p == pytest.approx(0.0010, abs=0.00005)


@given(y=VALUES)
@settings(max_examples=25, deadline=None)
def test_both_agree_with_their_reference_libraries(y):
    stats = pytest.importorskip("scipy.stats", reason="the reference library is not installed")
    kendall = pytest.importorskip("pymannkendall", reason="the reference library is not installed")
    found, trend = theil_sen(range(len(y)), y, 0.9), mann_kendall(y)
    reference = stats.theilslopes(y, method="separate", alpha=0.9)
    assert (found.slope, found.at_median) == pytest.approx((reference.slope, reference.intercept), abs=1e-9)
    if found.low > -inf and found.high < inf:
        assert (found.low, found.high) == pytest.approx((reference.low_slope, reference.high_slope), abs=1e-9)
    other = kendall.original_test(y)
    assert trend.s == other.s
    assert trend.variance == pytest.approx(other.var_s)
    assert (trend.z, trend.p) == pytest.approx((other.z, other.p), abs=1e-12)


@given(
    y=VALUES, unit=st.sampled_from([0.25, 2.0, 8.0]), shift=st.integers(-1000, 1000), width=st.floats(0.1, 0.98)
)
def test_slopes_follow_the_units_and_hold_between_their_limits(y, unit, shift, width):
    found = theil_sen(range(len(y)), y, width)
    moved = theil_sen([shift + unit * k for k in range(len(y))], [unit * unit * value for value in y], width)
    assert (moved.slope, moved.low, moved.high) == pytest.approx(
        (unit * found.slope, unit * found.low, unit * found.high)
    )
    assert found.low <= found.slope <= found.high


@given(y=VALUES)
def test_a_series_read_backwards_turns_its_trend_round(y):
    forward, backward = mann_kendall(y), mann_kendall(y[::-1])
    assert (backward.s, backward.z) == (-forward.s, -forward.z)
    assert 0 <= forward.p <= 1


def test_a_single_place_has_no_slope():
    with pytest.raises(ValueError, match="two different places"):
        theil_sen([3, 3], [1, 2])
