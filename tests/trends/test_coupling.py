from math import exp, pi, sin
from random import Random

import pytest
from hypothesis import given, strategies as st

from diskwatch.records import Direction
from diskwatch.trends.coupling import (
    DAYS,
    FOLLOWS,
    Coupling,
    Unknown,
    coupling,
    partial_correlation,
    rank_correlation,
)
from diskwatch.trends.shift import DayShift

FIGURES = st.lists(st.integers(-20, 20), min_size=2, max_size=40)


def scored(days):
    """Scored days from triples of day, shift and temperature."""
    return [
        DayShift(
            day=day,
            direction=Direction.READ,
            rollups=60,
            classes=4,
            shift=shift,
            temperature=warmth,
        )
        for day, shift, warmth in days
    ]


def test_the_worked_example_of_ten_pairs():
    """Ten pairs of intelligence and hours of watching, used in many texts (from memory): rho = -29/165."""
    one = [106, 100, 86, 101, 99, 103, 97, 113, 112, 110]
    other = [7, 27, 2, 50, 28, 29, 20, 12, 6, 17]
    assert rank_correlation(one, other) == pytest.approx(-29 / 165)


def test_equal_figures_share_their_mean_rank():
    """Worked by hand: ranks 1.5, 1.5, 3 against 1, 2, 3 give 1.5 / sqrt(1.5 * 2)."""
    assert rank_correlation([5, 5, 9], [1, 2, 3]) == pytest.approx(1.5 / 3**0.5)


@given(FIGURES)
def test_a_series_follows_itself_and_any_rising_image_of_itself(figures):
    found = rank_correlation(figures, [figure**3 + figure for figure in figures])
    assert found == (None if len(set(figures)) == 1 else pytest.approx(1))
    falling = rank_correlation(figures, [-figure for figure in figures])
    assert falling == (None if len(set(figures)) == 1 else pytest.approx(-1))


@given(FIGURES, st.randoms(use_true_random=False))
def test_the_correlation_is_the_same_both_ways_round(figures, shuffler):
    other = list(figures)
    shuffler.shuffle(other)
    assert rank_correlation(figures, other) == rank_correlation(other, figures)


def test_series_of_different_length_are_refused():
    with pytest.raises(ValueError, match="zip"):
        rank_correlation([1, 2], [1])


def test_slowness_that_rises_and_falls_with_the_temperature_names_heat():
    found = coupling(scored((day, 0.01 * (day % 9), 30 + day % 9) for day in range(40)))
    assert found.heat
    assert found.correlation == pytest.approx(1)
    assert found.days == DAYS


def weather(chance, days):
    """Degrees by which days differ, each resembling the one before."""
    degrees = 0.0
    for _ in range(days):
        degrees = 0.6 * degrees + 0.8 * chance.gauss()
        yield degrees


def of_runs(run, runs=200):
    """In what share of seeded runs of 40 days heat is named.

    Args:
        run: gives shift and temperature of a day from the day, the weather and a noise of one standard spread.
        runs: how many.
    """
    named = 0
    for seed in range(runs):
        chance = Random(seed)  # noqa: S311 - a simulation, seeded so that it repeats itself
        lived = [(day, *run(day, degrees, chance.gauss())) for day, degrees in enumerate(weather(chance, 40))]
        named += coupling(scored(lived)).heat
    return named / runs


def test_a_head_that_weakens_in_spring_is_not_blamed_on_heat():
    """Both rise, each for its own reason; a plain rank correlation names heat in nearly every run."""

    def weakening(day, degrees, noise):
        spring = 35 + 2.5 * sin(2 * pi * (day - 20) / 365) + 0.3 * degrees
        return 0.6 / (1 + exp((20 - day) / 6)) + 0.05 * noise, spring

    assert of_runs(weakening) <= 0.02
    chance = Random(1)  # noqa: S311 - a simulation, seeded so that it repeats itself
    pairs = [weakening(day, degrees, chance.gauss()) for day, degrees in enumerate(weather(chance, 40))][-DAYS:]
    plain = rank_correlation(*zip(*pairs, strict=True))
    assert plain is not None
    assert plain > FOLLOWS


def test_a_head_that_weakens_as_the_room_warms_in_a_straight_line_is_not_blamed_on_heat():
    assert of_runs(lambda day, degrees, noise: (0.012 * day + 0.06 * noise, 30 + 0.08 * day + degrees)) <= 0.02


def test_slowness_that_the_weather_makes_is_heat_also_while_the_season_warms():
    def throttled(day, degrees, noise):
        warmth = 40 + 2 * degrees + 0.1 * day
        return 0.05 * (warmth - 40) + 0.06 * noise, warmth

    assert of_runs(throttled) >= 0.95


def test_slowness_that_comes_and_goes_with_hot_spells_is_heat():
    def spells(day, degrees, noise):
        hot = day % 12 < 5
        return 0.3 * hot + 0.06 * noise, 35 + degrees + 10 * hot

    assert of_runs(spells) >= 0.95


def test_days_that_have_nothing_to_do_with_each_other_seldom_name_heat():
    assert of_runs(lambda _day, degrees, noise: (0.06 * noise, 35 + degrees), runs=400) <= 0.03


def test_a_partial_correlation_worked_by_hand():
    """(0.8 - 0.6 * 0.5) / sqrt(0.64 * 0.75) = 0.7217."""
    assert partial_correlation(0.8, 0.6, 0.5) == pytest.approx(0.72169, abs=5e-6)
    assert partial_correlation(0.8, 0.0, 0.0) == pytest.approx(0.8)
    assert partial_correlation(1.0, 1.0, 1.0) is None


def test_a_series_that_is_nothing_but_a_trend_leaves_nothing_to_compare():
    found = coupling(scored((day, 0.01 * day, 30 + day % 5) for day in range(40)))
    assert found == Coupling(correlation=None, unknown=Unknown.ONLY_TREND, days=DAYS)
    assert not found.heat


def test_slowness_that_does_not_follow_temperature_names_none():
    found = coupling(scored((day, 0.01 * (day % 9), 30 + day % 7) for day in range(40)))
    assert found.correlation is not None
    assert abs(found.correlation) < FOLLOWS
    assert not found.heat


def test_only_days_with_both_figures_count():
    days = [(day, 0.01 * day, 30 + day) for day in range(29)]
    without = [(29, None, 60), (30, 0.3, None)]
    assert coupling(scored([*days, *without])) == Coupling(correlation=None, unknown=Unknown.FEW_DAYS, days=29)
    assert coupling(()) == Coupling(correlation=None, unknown=Unknown.FEW_DAYS, days=0)


def test_days_of_another_season_do_not_count():
    days = [(day * 5, 0.01 * day, 30 + day) for day in range(30)]
    assert coupling(scored(days)).unknown is Unknown.FEW_DAYS


def test_a_temperature_that_never_changes_couples_with_nothing():
    found = coupling(scored((day, 0.01 * day, 30) for day in range(30)))
    assert found == Coupling(correlation=None, unknown=Unknown.STEADY, days=30)
