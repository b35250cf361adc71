from math import exp, expm1, gamma, log, sqrt
from random import Random

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.special import normal_cdf
from diskwatch.trends.wandering import outlasts

AMOUNTS = st.floats(0.02, 20)
VARIANCES = st.floats(0.01, 1.6)
ERRORS = st.floats(0, 0.6)
TIMES = st.floats(0.01, 60)


@pytest.mark.parametrize("amount", [0.1, 0.5, 1.0, 3.0, 10.0])
@pytest.mark.parametrize("index", [1.0, 2.0, 4.0])
def test_the_law_has_the_laplace_transform_that_bessel_processes_give_it(amount, index):
    """E exp(-index^2 T / 8) = (2z)^(-index/2) G(1 + index/2)/G(1 + index) 1F1(...), z = amount/4, sigma = 1.

    Planar Bessel process from 1, its clock to z, absolute continuity between indices (Yor 1992; derived here).
    """
    special = pytest.importorskip("scipy.special", reason="the reference library is not installed")
    z = amount / 4
    factor = (2 * z) ** (-index / 2) * gamma(1 + index / 2) / gamma(1 + index)
    exact = factor * special.hyp1f1(index / 2, 1 + index, -1 / (2 * z))
    rate, width = index * index / 8, 0.01
    times = [exp(-9 + width * k) for k in range(int((9 + log(149)) / width))]
    # 1 - E exp(-rate T) is the integral of rate exp(-rate t) P(T > t), and P is 1 for the smallest times.
    found = -expm1(-rate * times[0]) + width * sum(
        rate * t * exp(-rate * t) * outlasts(t, amount=amount, variance=1.0, error=0.0) for t in times
    )
    assert 1 - found == pytest.approx(exact, abs=6e-4)


@pytest.mark.parametrize(("variance", "error"), [(0.2, 0.0), (0.8, 0.3)])
def test_the_law_is_what_simulated_use_does(variance, error):
    chance = Random(5)  # noqa: S311 - a simulation, seeded so that it repeats itself
    step, drives = 0.01, 1200
    ends = []
    for _ in range(drives):
        level, left, years = 0.0, exp(error * chance.gauss(0, 1)), 0.0
        while left > 0 and years < 8:
            before = level
            level += sqrt(variance * step) * chance.gauss(0, 1)
            left -= step * (exp(before) + exp(level)) / 2
            years += step
        ends.append(years)
    for years in (0.6, 0.9, 1.2, 2.0):
        seen = sum(end > years for end in ends) / drives
        told = outlasts(years, amount=1.0, variance=variance, error=error)
        assert told == pytest.approx(seen, abs=4 * 0.5 / sqrt(drives))


@given(years=st.floats(0.01, 10), amount=AMOUNTS, error=st.floats(0.05, 0.6))
def test_a_pace_that_hardly_wanders_leaves_the_error_of_the_amount_alone(years, amount, error):
    told = outlasts(years, amount=amount, variance=1e-9, error=error)
    assert told == pytest.approx(normal_cdf(log(amount / years) / error), abs=1e-6)


@given(years=TIMES, amount=AMOUNTS, variance=VARIANCES, error=ERRORS, more=st.floats(1.0, 3.0))
def test_the_chance_falls_with_the_time_and_rises_with_the_amount(years, amount, variance, error, more):
    here = outlasts(years, amount=amount, variance=variance, error=error)
    assert 0 <= here <= 1
    assert outlasts(years * more, amount=amount, variance=variance, error=error) <= here + 2e-3
    assert outlasts(years, amount=amount * more, variance=variance, error=error) >= here - 1e-9


@given(years=st.floats(0.1, 10), amount=AMOUNTS, variance=VARIANCES, error=ERRORS, unit=st.floats(0.2, 5))
def test_the_law_does_not_depend_on_the_unit_of_time(years, amount, variance, error, unit):
    one = outlasts(years, amount=amount, variance=variance, error=error)
    other = outlasts(years * unit, amount=amount * unit, variance=variance / unit, error=error)
    assert one == pytest.approx(other, abs=1e-9)


@given(amount=AMOUNTS, error=ERRORS, share=st.floats(-0.5, 0.5))
def test_the_two_ways_of_working_it_out_meet_where_one_hands_over_to_the_other(amount, error, share):
    years = amount * exp(-share)
    below = outlasts(years, amount=amount, variance=0.09999 / years, error=error)
    above = outlasts(years, amount=amount, variance=0.10001 / years, error=error)
    assert below == pytest.approx(above, abs=3e-3)
