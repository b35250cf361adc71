import statistics

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.middle import median, scaled_mad, weighted_quantile

FIGURES = st.lists(st.floats(-1e6, 1e6), min_size=1, max_size=30)


@given(FIGURES)
def test_the_median_is_the_one_of_the_standard_library(figures):
    assert median(figures) == statistics.median(figures)


@given(FIGURES)
def test_the_spread_does_not_depend_on_the_order_or_the_sign(figures):
    assert scaled_mad(figures[::-1]) == scaled_mad(figures)
    assert scaled_mad([-figure for figure in figures]) == scaled_mad(figures)


def test_the_spread_of_one_to_five():
    assert scaled_mad([5, 1, 4, 2, 3]) == pytest.approx(1.4826)


def test_the_weighted_thirty_percent_quantile_of_the_worked_example():
    """Computed by two routes; the total weight is 42, and 9 + 12 is the first sum beyond 12.6."""
    assert weighted_quantile([0.02, 0.10, 0.15, 0.30, -0.05], [12, 6, 12, 3, 9], 0.3) == 0.02


@given(st.lists(st.tuples(st.floats(-5, 5), st.integers(1, 20)), min_size=1, max_size=12), st.floats(0.01, 1))
def test_a_weight_counts_as_so_many_equal_figures(pairs, share):
    figures, weights = zip(*pairs, strict=True)
    repeated = sorted(figure for figure, weight in pairs for _ in range(weight))
    place = next(n for n in range(1, len(repeated) + 1) if n >= share * len(repeated) * (1 - 1e-12))
    assert weighted_quantile(figures, weights, share) == repeated[place - 1]


def test_a_share_that_is_met_exactly_is_met_in_binary_fractions_too():
    assert weighted_quantile([1, 2, 3], [0.1 * 3, 0.3, 0.4], 0.3) == 1
    assert weighted_quantile(range(10), [0.1] * 10, 0.3) == 2


@pytest.mark.parametrize("nothing", [lambda: median([]), lambda: scaled_mad([])])
def test_no_figures_have_no_middle(nothing):
    with pytest.raises(ValueError, match="no figures"):
        nothing()


def test_figures_without_weight_have_no_quantile():
    with pytest.raises(ValueError, match="without weight"):
        weighted_quantile([1.0], [0.0], 0.3)
    with pytest.raises(ValueError, match="zip"):
        weighted_quantile([1.0], [1.0, 2.0], 0.3)
