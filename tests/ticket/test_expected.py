from dataclasses import replace

from diskwatch.records import CallWord, Forecast
from diskwatch.ticket.expected import margin_part, odds_part
from diskwatch.units import day_number
from tests.history.examples import a_call
from tests.samples import DAY, NOON, NVME
from tests.ticket.lives import a_ticket, days, opened
from tests.ticket.test_cautions import LINE

TODAY = day_number(NOON)


def test_odds_come_with_interval_horizon_and_source(folder):
    passes = days(30, lambda day: {"pending_sectors": 64 * (day > 20), "reallocated_sectors": 64 * (day > 25)})
    with opened(folder, passes) as past:
        told = a_ticket(past, NOON + 30 * DAY)["odds"]
    assert told["low"] <= told["share"] <= told["high"]
    assert told["days"] == 30
    assert "2013" in told["source"]
    assert told["since"]


def test_without_figures_there_are_no_odds_but_a_reason():
    for line in (LINE, replace(LINE, drive=NVME)):
        part = odds_part(line, NOON)
        assert part.value is None
        assert part.reason


def test_the_margin_is_that_of_the_first_limit_with_its_probability():
    made = Forecast(
        signal="percentage-used", limit=100, made_on_day=TODAY, low=5, high=40, probability=0.8, reason=None
    )
    later = replace(made, signal="available-spare", low=50, high=90)
    line = replace(LINE, call=a_call(CallWord.COPY, NOON - DAY), forecasts=(made, later))
    told = margin_part(line, NOON).value
    assert isinstance(told, dict)
    assert (told["low_days"], told["high_days"], told["probability"]) == (5, 40, 0.8)
    assert told["signal"] == "percentage-used"
    assert told["replace_by"] == "2024-10-09T00:00:00Z"


def test_an_unknown_margin_says_why():
    part = margin_part(LINE, NOON)
    assert part.value is None
    assert part.reason
