from math import log

import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.trends.latency_forecast import LEAST, MOST, TWICE, forecast
from tests.trends.populations import coverage, show, slowing, told_by


def rising(days=60, per_day=0.004, start=0.1, shake=0.01):
    """A straight rise with a shake of two and three days, so that it is never quite even."""
    x = list(range(days))
    return x, [start + per_day * day + shake * ((day % 2) - (day % 3) / 2) for day in x]


def ends(interval):
    assert interval.low is not None
    assert interval.high is not None
    return interval.low, interval.high


def test_a_straight_rise_is_expected_where_its_line_ends():
    x, y = rising()
    low, high = ends(forecast(x, y))
    true = (TWICE - 0.1) / 0.004 - 59
    assert low < true < high
    assert (low * high) ** 0.5 == pytest.approx(true, rel=0.1)


def test_an_exact_line_has_nothing_but_its_future_to_doubt():
    x = list(range(LEAST))
    low, high = ends(forecast(x, [0.01 * day for day in x]))
    true = TWICE / 0.01 - 7
    # 0.57 sqrt(T/270 + 8/242), 80 %.
    assert log(high / true) == pytest.approx(1.28155 * 0.57 * (true / 270 + 8 / 242) ** 0.5, rel=1e-3)
    assert log(true / low) == pytest.approx(log(high / true), rel=1e-3)


def test_too_few_days_give_the_reason():
    x, y = rising(LEAST - 1)
    assert forecast(x, y).reason == "fewer than 8 days could be compared since it began"
    assert forecast([3.0] * 20, [0.1] * 20).reason == "fewer than 8 days could be compared since it began"


def test_what_gets_faster_again_gets_no_date():
    x, y = rising(per_day=-0.004, start=0.5)
    assert forecast(x, y).reason == "it is not getting slower now"


def test_a_rise_that_may_be_none_has_no_upper_end():
    x, y = rising(per_day=0.0006, shake=0.25)
    interval = forecast(x, y)
    assert interval.known
    assert interval.high is None


def test_a_limit_that_is_reached_leaves_no_time():
    x, y = rising(per_day=0.02)
    assert ends(forecast(x, y)) == (0, 0)


def test_a_limit_that_may_be_reached_by_now_begins_at_once():
    x, y = rising(per_day=0.01, start=0.09, shake=0.1)
    assert forecast(x, y).low == 0


def test_only_the_latest_days_count():
    x, y = rising(MOST + 50)
    assert forecast(x, y, limit=1.2) == forecast(x[50:], y[50:], limit=1.2)


def test_days_without_a_shift_each_are_refused():
    with pytest.raises(ValueError, match="cannot have"):
        forecast([1, 2], [0.1])


def test_one_wild_day_hardly_moves_it():
    x, y = rising()
    calm = ends(forecast(x, y))
    wild = forecast(x, [*y[:30], 3.0, *y[31:]])
    assert wild.low is not None
    assert calm[0] * 0.3 < wild.low < calm[1]


@given(shift=st.integers(-20_000, 20_000), unit=st.sampled_from([0.5, 2.0, 4.0]))
@settings(max_examples=15, deadline=None)
def test_the_day_that_counting_starts_from_and_the_unit_of_slowness_do_not_matter(shift, unit):
    x, y = rising()
    moved = forecast([shift + day for day in x], [unit * one for one in y], limit=unit * TWICE)
    assert ends(moved) == pytest.approx(ends(forecast(x, y)), rel=1e-6)


@given(
    per_day=st.floats(0.001, 0.008),
    shake=st.floats(0, 0.03),
    probability=st.floats(0.5, 0.9),
    further=st.floats(0.05, 0.5),
)
@settings(max_examples=25, deadline=None)
def test_a_further_limit_is_never_expected_sooner_and_a_surer_interval_is_never_narrower(
    per_day, shake, probability, further
):
    x, y = rising(per_day=per_day, shake=shake, start=0.0)
    infinite = float("inf")

    def told(limit, sure):
        interval = forecast(x, y, limit=limit, probability=sure)
        assert interval.low is not None
        return interval.low, infinite if interval.high is None else interval.high

    here, later = told(TWICE, probability), told(TWICE + further, probability)
    surer, middle = told(TWICE, (1 + probability) / 2), told(TWICE, 1e-6)
    assert here[0] <= later[0]
    assert here[1] <= later[1]
    assert surer[0] <= here[0] <= middle[0] <= middle[1] * (1 + 1e-5)
    assert middle[1] <= here[1] <= surer[1]


def test_the_intervals_hold_about_as_often_as_they_say():
    """A short look with wide bounds; the long one is in the benchmarks."""
    told = told_by(slowing, seed=3, drives=60)
    assert 0.65 <= coverage(told).share <= 0.97


@pytest.mark.bench
def test_the_coverage_of_the_latency_forecast_reaches_its_goal():
    """Goal: 80 to 87 % of nominal 80 %, at least 77; upper over lower end about 6 in the study."""
    told = told_by(slowing, seed=5, drives=800)
    show(f"latency, a slope that wanders: {coverage(told)}   (goal 80 to 87 %)")
    for name, make in {
        "a straight slope": lambda chance: slowing(chance, wander=0.0),
        "half the wandering": lambda chance: slowing(chance, wander=0.25),
        "one and a half times the wandering": lambda chance: slowing(chance, wander=0.75),
        "twice the noise": lambda chance: slowing(chance, noise=0.1),
        "days very much alike": lambda chance: slowing(chance, alike=0.9),
    }.items():
        show(f"  {name}: {coverage(told_by(make, seed=6, drives=250))}")
    assert coverage(told).share >= 0.77
