from dataclasses import replace

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


def failing(days, *, every=12, hours=24, quiet=400):
    """A disk without a defect for a while, and then one every so many days; a reading a day."""
    return [
        read(
            NOON + day * DAY,
            HDD,
            pending_sectors=0,
            reallocated_sectors=max(0, day - quiet) // every,
            power_on_hours=day * hours,
        )
        for day in range(quiet + days)
    ]


def test_a_media_drift_brings_an_interval_for_the_occasions_that_are_to_come():
    told = asked(failing(12 * 8))["media-episodes"]
    assert (told.limit, told.limit_from, told.probability) == (10, LimitSource.OWN, 0.8)
    assert 0 < told.low < 3 * 12 < told.high


def test_a_disk_that_is_seldom_on_has_its_occasions_further_apart_in_days():
    often, seldom = (asked(failing(24 * 8, every=24, hours=one))["media-episodes"] for one in (24, 12))
    assert seldom.known
    assert seldom.high > 0.9 * often.high


def test_the_occasion_that_was_foretold_is_told_on_its_day_and_the_next_limit_with_it():
    passes = failing(12 * 10 + 1)
    state = lived(*passes)[-1].state
    assert state.streams["media"].episodes == 10
    told = [one for one in analyser.forecasts(state, passes[-1].at) if one.signal == "media-episodes"]
    assert [(one.limit, one.high == 0) for one in told] == [(10, True), (15, False)]


def test_a_state_that_kept_no_days_says_so_until_enough_came():
    passes = failing(12 * 8)
    state = lived(*passes)[-1].state
    stream = replace(state.streams["media"], opened=())
    older = replace(state, streams={**state.streams, "media": stream})
    (told,) = analyser.forecasts(older, passes[-1].at)
    assert told.reason == "the days of its earlier episodes were not kept yet"


def test_where_an_alarm_is_over_its_forecast_says_so():
    state = lived(*failing(2))[-1].state
    (told,) = analyser.forecasts(state, NOON, ["media-episodes"])
    assert (told.known, told.reason) == (False, "its alarm is over")


def test_a_drifting_link_has_no_limit_to_wait_for():
    passes = [read(NOON + day * DAY, HDD, crc_errors=day // 10) for day in range(120)]
    assert "drift:link" in lived(*passes)[-1].state.standing
    assert asked(passes) == {}


def test_a_turning_disk_has_no_wear_to_forecast():
    assert asked([read(NOON + day * DAY, HDD, pending_sectors=0) for day in range(100)]) == {}


def test_a_state_saved_and_loaded_forecasts_the_same():
    passes = writing(200, available_spare=100, spare_threshold=10, temperature=40)
    state = lived(*passes)[-1].state
    again = analyser.load(analyser.dump(state))
    assert analyser.dump(again) == analyser.dump(state)
    assert analyser.forecasts(again, passes[-1].at) == analyser.forecasts(state, passes[-1].at)
