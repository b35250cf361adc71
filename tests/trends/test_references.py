import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.references import CLASS_DAYS, LEAST_SPREAD, Reference, all_learnt, learnt

MEDIANS = st.lists(st.floats(-3, 8), min_size=CLASS_DAYS, max_size=30)


def after(medians):
    reference = Reference()
    for one in medians:
        reference = learnt(reference, one)
    return reference


def test_eleven_days_are_not_enough():
    assert after([1.0] * 11).level is None
    assert after([1.0] * 12).level == 1.0


@given(MEDIANS)
def test_a_reference_is_frozen_after_its_twelfth_day(medians):
    assert after(medians) == after(medians[:CLASS_DAYS])


def test_twelve_days_that_agree_by_chance_still_count_as_spread():
    assert after([2.0] * 12).spread == LEAST_SPREAD


def test_one_wild_day_moves_neither_the_level_nor_the_spread():
    assert after([1.0] * 11 + [9.0]) == Reference(medians=(1.0,) * 11 + (9.0,), level=1.0, spread=LEAST_SPREAD)


def test_the_spread_is_the_scaled_median_absolute_deviation():
    assert after([0.0] * 6 + [1.0] * 6).spread == pytest.approx(1.4826 * 0.5)


def test_classes_learn_each_for_itself_and_a_day_without_news_keeps_the_very_same_table():
    known = all_learnt({}, {3: 1.0})
    assert known == {3: Reference(medians=(1.0,))}
    both = all_learnt(known, {7: 2.0})
    assert both == {3: Reference(medians=(1.0,)), 7: Reference(medians=(2.0,))}
    complete = {3: after([1.0] * 12)}
    assert all_learnt(complete, {3: 5.0}) is complete
