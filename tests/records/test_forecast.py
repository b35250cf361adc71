from dataclasses import replace

from hypothesis import given, strategies as st

from diskwatch.records import Forecast

MADE = Forecast(
    signal="percentage-used", limit=100, made_on_day=20_000, low=10.4, high=30.2, probability=0.8, reason=None
)
SILENT = replace(MADE, low=None, high=None, reason="less than 180 days of wear were seen")


def test_an_outcome_within_the_interval_holds_to_the_whole_day():
    assert MADE.held(reached=20_010, seen_until=20_010) is True
    assert MADE.held(reached=20_031, seen_until=20_040) is True


def test_an_outcome_before_or_behind_the_interval_does_not_hold():
    assert MADE.held(reached=20_009, seen_until=20_009) is False
    assert MADE.held(reached=20_032, seen_until=20_032) is False


def test_a_limit_that_is_not_reached_is_open_until_the_interval_is_over():
    assert MADE.held(reached=None, seen_until=20_031) is None
    assert MADE.held(reached=None, seen_until=20_032) is False


def test_an_interval_without_an_upper_end_holds_once_its_lower_end_has_passed():
    endless = replace(MADE, high=None)
    assert endless.held(reached=None, seen_until=20_010) is None
    assert endless.held(reached=None, seen_until=20_011) is True
    assert endless.held(reached=20_005, seen_until=20_005) is False


def test_a_forecast_that_said_nothing_has_no_outcome():
    assert not SILENT.known
    assert SILENT.held(reached=20_015, seen_until=20_500) is None


@given(
    low=st.floats(0, 4000),
    width=st.floats(0, 4000),
    waited=st.integers(0, 9000),
    longer=st.integers(0, 9000),
)
def test_what_was_decided_stays_decided_while_a_drive_is_watched_on(low, width, waited, longer):
    made = replace(MADE, low=low, high=low + width)
    now = made.held(reached=None, seen_until=made.made_on_day + waited)
    later = made.held(reached=None, seen_until=made.made_on_day + waited + longer)
    assert now is None or later is now
