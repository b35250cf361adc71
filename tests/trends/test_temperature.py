from math import cos, inf, nan, pi
from random import Random

import msgspec
import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.temperature import LEARNING, THRESHOLD, Temperature, accepted, after_day, line
from tests.trends.populations import show


def days(state, temperature, count, limit=60.0):
    for _ in range(count):
        state = after_day(state, temperature, limit=limit)
    return state


def usual(temperature=38.0, limit=60.0):
    return days(Temperature(), temperature, LEARNING, limit)


def test_thirty_days_are_learnt_from_before_anything_is_judged():
    assert line(days(Temperature(), 38.0, LEARNING - 1), 60.0) is None
    assert (usual().usual, usual().sigma, usual().ledger.evidence) == (38.0, 2.0, 0.0)


@pytest.mark.parametrize(("limit", "expected"), [(60.0, 50.0), (52.0, 47.0), (None, 50.0)])
def test_the_line_is_twelve_degrees_above_the_usual_and_five_below_the_drives_own_limit(limit, expected):
    assert line(usual(), limit) == expected


def test_a_lost_fan_is_found_within_a_fortnight():
    assert days(usual(), 56.0, 5).ledger.evidence < THRESHOLD
    assert days(usual(), 56.0, 14).ledger.evidence > THRESHOLD


def test_a_drive_that_always_ran_close_to_its_own_limit_is_found_though_nothing_changed():
    assert days(usual(58.0), 58.0, 30).ledger.evidence > THRESHOLD
    assert days(usual(58.0, None), 58.0, 300, None).ledger.evidence < 5


def test_a_temperature_that_is_no_number_changes_nothing():
    for none in (nan, inf, -inf):
        assert after_day(usual(), none, limit=60.0) == usual()


def test_an_accepted_temperature_is_the_new_usual_one():
    hot = accepted(days(usual(), 54.0, 40))
    assert hot == Temperature()
    assert days(hot, 54.0, 100, None).ledger.evidence < 5
    assert accepted(days(Temperature(), 38.0, 3)) == days(Temperature(), 38.0, 3)


@given(temperatures=st.lists(st.floats(15, 70), max_size=60), shift=st.sampled_from([-8.0, 16.0]))
def test_the_zero_of_the_scale_does_not_matter(temperatures, shift):
    here, there = Temperature(), Temperature()
    for temperature in (round(one) for one in temperatures):
        here = after_day(here, temperature, limit=60.0)
        there = after_day(there, temperature + shift, limit=60.0 + shift)
    assert there.ledger == here.ledger


@given(temperatures=st.lists(st.floats(15, 70), max_size=60))
def test_the_state_comes_back_from_text_to_the_same_bits_and_warmer_days_never_lower_it(temperatures):
    live = saved = warmer = Temperature()
    for day, temperature in enumerate(temperatures):
        live = after_day(live, temperature, limit=60.0)
        saved = after_day(
            msgspec.json.decode(msgspec.json.encode(saved), type=Temperature), temperature, limit=60.0
        )
        warmer = after_day(warmer, temperature + (3 if day >= LEARNING else 0), limit=60.0)
    assert saved == live
    assert warmer.ledger.evidence >= live.ledger.evidence


def alarms(swing: float, drives: int, years: int) -> int:
    """Drives that alarm in a room whose seasons swing by so much to either side, begun on any day."""
    chance = Random(6)  # noqa: S311 - a simulation, seeded so that it repeats itself
    found = 0
    for _ in range(drives):
        state, start, weather = Temperature(), chance.uniform(0, 365), 0.0
        for day in range(int(365.25 * years)):
            weather = 0.8 * weather + chance.gauss(0, 1.2)
            season = -swing * cos(2 * pi * (start + day) / 365.25)
            state = after_day(state, round(38 + season + weather + chance.gauss(0, 1)), limit=60.0)
            if state.ledger.evidence > THRESHOLD:
                found += 1
                break
    return found


def test_a_room_with_mild_seasons_raises_no_alarm():
    assert alarms(4.0, 8, 2) == 0


@pytest.mark.bench
def test_from_which_seasons_on_the_bound_breaks():
    """Share 0.03 of one in ten years: at most 0.03 alarms in ten years while the norm holds."""
    for swing in (3.0, 5.0, 6.0, 7.0, 8.0, 10.0):
        found = alarms(swing, 60, 5)
        show(f"temperature, seasons +-{swing:.0f} degrees: {found} of 60 drives alarmed within 5 years")
        if swing <= 5:
            assert found == 0
