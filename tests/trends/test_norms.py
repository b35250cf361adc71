import pytest

from diskwatch.trends.norms import BUDGET, NORMS, STREAM_OF


def test_the_thresholds_of_a_share_of_a_fifth_are_those_published_with_the_method():
    media = STREAM_OF["pending-sectors"]
    assert media.share == 0.20
    assert media.guaranteed == 18262.5
    assert media.threshold == 9131.25


def test_the_budget_is_ten_years_and_the_shares_leave_room_for_the_signals_that_are_not_counters():
    assert BUDGET == 3652.5
    others = 0.12 + 0.05 + 0.12 + 0.04 + 0.03 + 0.02
    assert sum(norm.share for norm in NORMS) + others == pytest.approx(1)


def test_no_counter_belongs_to_two_streams():
    assert len(STREAM_OF) == sum(len(norm.signals) for norm in NORMS)
