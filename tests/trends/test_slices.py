from random import Random

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.slices import late_requests, turn_ms
from tests.trends.probes import TURN, slice_times


def test_a_turn_takes_what_the_speed_says():
    assert turn_ms(7200) == pytest.approx(8.333, abs=5e-4)
    assert turn_ms(5400) == pytest.approx(11.111, abs=5e-4)


def test_a_disk_that_does_not_turn_has_no_turn():
    with pytest.raises(ValueError, match="has no turn"):
        turn_ms(0)


def test_a_request_held_up_by_a_turn_is_late_and_its_place_is_told():
    times = [2.0] * 100
    times[0] += TURN
    times[41] += TURN
    times[99] += 2 * TURN
    assert late_requests(times, turn=TURN) == (0, 41, 99)


def test_a_zone_that_reads_more_slowly_all_over_holds_no_late_request():
    """The inner zones of a disk carry less a turn: only the neighbours tell."""
    assert late_requests([2.0] * 50 + [7.0] * 50, turn=TURN) == ()


def test_an_empty_slice_has_no_late_request():
    assert late_requests([], turn=TURN) == ()


@given(seed=st.integers(0, 1000))
def test_exactly_the_retried_requests_are_late(seed):
    chance = Random(seed)  # noqa: S311 - a simulation, seeded so that it repeats itself
    times = slice_times(chance, 100, retried=0.03)
    assert late_requests(times, turn=TURN) == tuple(place for place, time in enumerate(times) if time > TURN)


@given(times=st.lists(st.floats(0.1, 100), max_size=60), unit=st.sampled_from([0.5, 2.0, 1024.0]))
def test_the_unit_of_time_does_not_matter(times, unit):
    assert late_requests([unit * time for time in times], turn=unit * TURN) == late_requests(times, turn=TURN)
