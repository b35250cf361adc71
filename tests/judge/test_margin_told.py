from diskwatch.judge.margin_told import margin_told, replace_by_told
from diskwatch.records import Margin
from diskwatch.units import day_number
from tests.samples import NOON

TODAY = day_number(NOON)


def left(low, high):
    return Margin(low=low, high=high, probability=0.8, signal="percentage-used", limit=100)


def test_a_margin_is_told_as_an_interval_with_its_probability():
    assert margin_told(left(12.0, 30.0), NOON) == (
        "Percentage used: as things go now its limit of 100 is reached in 12 to 30 days (80 % of such "
        "intervals hold)."
    )


def test_beyond_five_years_no_date_is_told():
    assert "in more than 5 years" in margin_told(left(3000.0, 9000.0), NOON)
    assert "beyond 5 years" in margin_told(left(300.0, None), NOON)


def test_a_limit_that_is_reached_is_no_forecast():
    assert margin_told(left(0.0, 0.0), NOON) == "Percentage used: its limit of 100 is reached."


def test_an_unknown_margin_tells_why():
    assert margin_told(Margin(reason="too few steps so far"), NOON) == "Margin not known: too few steps so far."


def test_the_day_of_replacement_is_said_to_be_no_forecast_and_lateness_is_told():
    assert "no forecast" in replace_by_told(TODAY + 14, TODAY)
    assert "2024-10-18" in replace_by_told(TODAY + 14, TODAY)
    assert "without further delay" in replace_by_told(TODAY - 1, TODAY)
