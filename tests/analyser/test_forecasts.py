import pytest

from diskwatch import analyser
from diskwatch.records import LimitSource
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, NOON, NVME, read

YEAR = 365


def writing(days, *, a_day=100_000_000_000, percent_a_day=0.1, **more):
    """A drive that is written to evenly: a reading a day."""
    return [
        read(
            NOON + day * DAY,
            NVME,
            percentage_used=10 + int(day * percent_a_day),
            data_written=day * a_day,
            power_on_hours=day * 24,
            **more,
        )
        for day in range(days)
    ]


def asked(passes):
    state = lived(*passes)[-1].state
    return {one.signal: one for one in analyser.forecasts(state, passes[-1].at)}


def test_even_wear_is_forecast_around_the_day_on_which_it_will_be_used_up():
    told = asked(writing(YEAR))["percentage-used"]
    left = (100 - 10 - YEAR * 0.1) / 0.1
    assert told.low < left < told.high
    assert (told.limit, told.limit_from, told.probability) == (100, LimitSource.STANDARD, 0.8)
    assert told.made_on_day == (NOON + (YEAR - 1) * DAY) // DAY


def test_too_little_to_go_by_is_said_with_the_reason():
    told = asked(writing(20))["percentage-used"]
    assert not told.known
    assert "fewer than 40 powered days" in told.reason


def test_a_limit_that_is_reached_is_now():
    told = asked(writing(YEAR, percent_a_day=0.3))["percentage-used"]
    assert (told.low, told.high) == (0, 0)


@pytest.mark.parametrize(
    ("threshold", "limit", "limit_from"),
    [({"spare_threshold": 5}, 5, LimitSource.DRIVE), ({}, 10, LimitSource.USUAL)],
)
def test_the_limit_of_spare_is_the_drives_own_and_else_a_usual_one_that_says_so(threshold, limit, limit_from):
    told = asked(writing(60, available_spare=100, **threshold))["available-spare"]
    assert (told.limit, told.limit_from) == (limit, limit_from)
    assert told.reason


def test_a_turning_disk_has_no_wear_to_forecast():
    assert asked([read(NOON + day * DAY, HDD, pending_sectors=0) for day in range(100)]) == {}


def test_a_state_saved_and_loaded_forecasts_the_same():
    passes = writing(200, available_spare=100, spare_threshold=10, temperature=40)
    state = lived(*passes)[-1].state
    again = analyser.load(analyser.dump(state))
    assert analyser.dump(again) == analyser.dump(state)
    assert analyser.forecasts(again, passes[-1].at) == analyser.forecasts(state, passes[-1].at)
