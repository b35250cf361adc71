from math import expm1
from random import Random

import pytest
from hypothesis import given, strategies as st

from diskwatch.judge.outlook import DAYS, outlook
from diskwatch.records import Forecast
from diskwatch.trends import episodes
from diskwatch.trends.norms import NORMS
from diskwatch.trends.waiting import chance_while_sound
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, read

FIRST = NOON // DAY


def wear(low, high, *, made=FIRST, reason=None):
    return Forecast(
        signal="percentage-used",
        limit=100,
        made_on_day=made,
        low=low,
        high=high,
        probability=0.8,
        reason=reason,
    )


def ahead(*forecasts, state=None, day=FIRST, days=DAYS):
    streams, standing = ({}, {}) if state is None else (state.streams, state.standing)
    return outlook(streams, standing, forecasts, first_day=FIRST, day=day, days=days)


def chances(forecast, **more):
    (limit,) = ahead(forecast, **more).limits
    return limit.low, limit.high


def test_a_limit_falls_into_the_time_as_its_interval_says():
    assert chances(wear(800, 2000)) == pytest.approx((0, 0.1))
    assert chances(wear(100, 700)) == pytest.approx((0.9, 1))
    assert chances(wear(100, 2000)) == pytest.approx((0.1, 0.9))
    assert chances(wear(100, None)) == pytest.approx((0.1, 0.9))
    assert chances(wear(0, 0)) == (1, 1)


def test_the_time_is_counted_from_today_and_the_forecast_from_its_own_day():
    assert chances(wear(800, 2000), day=FIRST + 100)[0] == pytest.approx(0.1)


def test_what_cannot_be_dated_keeps_its_reason():
    found = ahead(wear(None, None, reason="too few steps so far"))
    assert (found.limits, found.unknown) == ((), {"percentage-used": "too few steps so far"})


def test_fresh_trouble_follows_the_law_of_the_waiting_times():
    """By hand for 400 quiet powered days: 1 - (765.25 / (765.25 + 730)) ^ 0.5 = 0.284630."""
    state = lived(*(read(NOON + day * DAY, pending_sectors=0) for day in range(400)))[-1].state
    (media,) = ahead(state=state, day=FIRST + 399).fresh
    assert media.chance == pytest.approx(1 - (765.25 / 1495.25) ** 0.5, rel=1e-9)
    assert media.chance == pytest.approx(chance_while_sound(1, within=730, episodes=0, exposure=400))
    assert not media.under_way


def test_a_drive_that_is_seldom_powered_has_less_to_come():
    daily = lived(*(read(NOON + day * DAY, pending_sectors=0) for day in range(60)))[-1].state
    seldom = lived(
        *(read(NOON + day * DAY, pending_sectors=0, power_on_hours=day // 10 * 3) for day in range(0, 60, 10))
    )[-1].state
    (much,), (little,) = (ahead(state=one, day=FIRST + 59).fresh for one in (daily, seldom))
    assert little.chance < much.chance


def test_trouble_under_way_is_expected_to_go_on():
    state = lived(*(read(NOON + day * DAY, crc_errors=day // 10) for day in range(60)))[-1].state
    (link,) = ahead(state=state, day=FIRST + 59).fresh
    assert link.under_way
    assert link.chance > 0.95


@given(st.integers(1, 2000), st.integers(1, 2000), st.integers(0, 9))
def test_a_longer_time_never_brings_less(first, second, episodes):
    state = lived(*(read(NOON + day * DAY, crc_errors=min(day // 10, episodes)) for day in range(0, 100, 5)))[
        -1
    ].state
    short, long = sorted((first, second))
    (a,), (b,) = (ahead(state=state, day=FIRST + 99, days=days).fresh for days in (short, long))
    assert a.chance <= b.chance


def population(drives, days, *, rates):
    """Chances of a fresh occasion in as many days to come, and whether one came, for drives of steady rates.

    Args:
        drives: how many.
        days: days of watching, and as many to come.
        rates: gives each drive's occasions a day.
    """
    chance = Random(3)  # noqa: S311 - a simulation, seeded so that it repeats itself
    norm = NORMS[0]
    for _ in range(drives):
        occasion = -expm1(-rates(chance))
        stream = episodes.begin(FIRST)
        for day in range(FIRST, FIRST + 2 * days):
            if day > FIRST:
                stream = episodes.next_day(stream, day=day, exposure=1.0, norm_per_day=norm.per_day)
            if chance.random() < occasion:
                stream = episodes.rise(stream, norm_per_day=norm.per_day)
            if day == FIRST + days - 1:
                (fresh,) = outlook({"media": stream}, {}, (), first_day=FIRST, day=day, days=days).fresh
        yield fresh.chance, stream.episodes > fresh.episodes


def told_and_came(cases):
    """How often it was expected, and how often it came."""
    said, came = zip(*cases, strict=True)
    return sum(said) / len(said), sum(came) / len(came)


def test_chances_come_true_among_drives_whose_rates_scatter_as_the_law_has_it():
    """Within three standard errors, for drives that had no occasion yet and for those that had, apart."""
    cases = list(population(400, 150, rates=lambda chance: chance.gammavariate(0.5, 1 / 365.25)))
    quiet = min(said for said, _ in cases)
    for part in ([one for one in cases if one[0] == quiet], [one for one in cases if one[0] > quiet]):
        said, came = told_and_came(part)
        assert len(part) >= 30
        assert abs(said - came) <= 3 * (said * (1 - said) / len(part)) ** 0.5


def test_a_drive_that_is_calmer_than_most_is_told_more_than_comes_to_it():
    """Its chance is that of all drives which were as quiet for as long: nothing tells it from these."""
    said, came = told_and_came(population(150, 150, rates=lambda _chance: 0.02 / 365.25))
    assert came <= 0.03 < said < 0.2
