from dataclasses import replace

from diskwatch.judge.forecast_told import fared, forecast
from diskwatch.records import Forecast, LimitSource
from tests.samples import DAY, NOON

TODAY = NOON // DAY
MADE = Forecast(
    signal="percentage-used", limit=100, made_on_day=TODAY, low=120.0, high=400.0, probability=0.8, reason=None
)


def test_a_forecast_is_told_as_an_interval_with_its_probability_and_who_set_its_limit():
    told = forecast(MADE, NOON)
    assert told.startswith(
        "Rated endurance used up (100 %, the maker's rating, as the standard counts it): between "
    )
    assert told.endswith("with 80 %.")


def test_a_limit_that_is_only_usual_says_so():
    told = forecast(replace(MADE, signal="available-spare", limit=10, limit_from=LimitSource.USUAL), NOON)
    assert "a limit that is usual among makers, since the drive states none" in told


def test_what_is_not_known_is_told_with_its_reason():
    told = forecast(replace(MADE, low=None, high=None, reason="nothing was written to it lately"), NOON)
    assert told.endswith("not known: nothing was written to it lately.")


def test_a_limit_that_is_reached_is_told_as_reached():
    assert forecast(replace(MADE, low=0.0, high=0.0), NOON).endswith(": reached.")


def test_days_are_counted_from_now_and_an_interval_that_is_over_says_so():
    soon = replace(MADE, low=20.0, high=40.0)
    assert ": in 20 to 40 days," in forecast(soon, NOON)
    assert ": in 15 to 36 days," in forecast(soon, NOON + 5 * DAY)
    assert forecast(soon, NOON + 41 * DAY).endswith("expected by now, and not reached.")


def test_a_signal_without_words_of_its_own_is_told_by_its_name():
    assert forecast(replace(MADE, signal="grown-defects"), NOON).startswith("grown defects at 100 (")


def test_how_earlier_forecasts_fared_counts_those_whose_time_is_over():
    kept = [(MADE, TODAY + 130), (MADE, TODAY + 60), (MADE, None), (replace(MADE, low=0.0, high=0.0), None)]
    told = fared(kept, seen_until=TODAY + 200)
    assert told == "Of 2 earlier forecasts whose time is over, 1 came true."
    assert fared([(MADE, None)], seen_until=TODAY + 200) is None
