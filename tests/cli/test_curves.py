from typing import cast

import pytest
from hypothesis import given, strategies as st

from diskwatch.cli.curves import Span, ahead_of, fit, gaps, thinned, usual
from diskwatch.history.reader import Past
from diskwatch.records import Forecast
from diskwatch.units import DAY

NOW = 20_000 * DAY
POINTS = st.lists(st.tuples(st.integers(0, NOW), st.integers(-99, 99).map(float)), min_size=1, max_size=60).map(
    lambda points: tuple(sorted(dict(points).items()))
)


def test_the_usual_range_leaves_the_rarest_twentieths_of_the_time_out():
    points = ((NOW - 100 * DAY, 30.0), (NOW - 50 * DAY, 40.0), (NOW - DAY, 90.0))
    assert usual(points, NOW) == (30.0, 40.0)


def test_what_is_known_for_less_than_a_week_is_not_called_usual():
    assert usual(((NOW - 6 * DAY, 30.0),), NOW) is None
    assert usual((), NOW) is None


@given(POINTS)
def test_the_usual_range_lies_within_what_was_read(points):
    found = usual(points, NOW)
    if found is not None:
        values = [value for _, value in points]
        assert min(values) <= found[0] <= found[1] <= max(values)


def test_a_steady_rise_is_fitted_by_its_own_line():
    points = tuple((NOW - days * DAY, float(100 - days)) for days in range(80, -1, -1))
    found = fit(points, NOW)
    assert found is not None
    (begin, low), (end, high) = found
    assert (begin, end) == (NOW - 80 * DAY, NOW)
    assert (high - low) / 80 == pytest.approx(1.0, abs=0.02)


def test_what_stands_still_and_what_is_too_young_has_no_line():
    assert fit(((NOW - 80 * DAY, 7.0),), NOW) is None
    assert fit(((NOW - DAY, 1.0), (NOW, 2.0)), NOW) is None


@given(st.integers(1, 9_000))
def test_thinning_keeps_ends_and_extremes_and_is_never_longer_than_a_screen_can_show(count):
    points = tuple((NOW - count * 60 + nth * 60, float((nth * 7_919) % 1_013)) for nth in range(count))
    found = thinned(points, Span(since=NOW - count * 60, at=NOW))
    assert len(found) <= 4 * 402
    assert found[0] == points[0]
    assert found[-1] == points[-1]
    assert max(value for _, value in found) == max(value for _, value in points)
    assert list(found) == sorted(found)


def test_a_forecast_is_counted_from_now():
    made = Forecast(
        signal="percentage-used",
        limit=100.0,
        made_on_day=NOW // DAY - 10,
        low=30.0,
        high=60.0,
        probability=0.8,
        reason=None,
    )
    found = ahead_of(made, NOW)
    assert found is not None
    assert (found.low, found.high) == (20.0, 50.0)


class _Unread:
    """A history that knows of no reading within any span."""

    def passes(self, *_asked):
        return ()

    def pass_days(self, *_asked):
        return ()


@pytest.mark.parametrize("days", [1, 400])
def test_a_span_without_any_reading_is_one_gap(days):
    span = Span(since=NOW - days * DAY, at=NOW)
    assert gaps(cast("Past", _Unread()), 1, span) == ((span.since, span.at),)
