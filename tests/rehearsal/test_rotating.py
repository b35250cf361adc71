from statistics import mean, pvariance

import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.rotating import Mix, Platters

RANDOM = Mix(size=4_096, sequential=0.0, cached=0.0, stroke=1.0)


@pytest.mark.parametrize(("rpm", "turn", "wait"), [(7_200, 8.33, 4.17), (5_400, 11.11, 5.56)])
def test_a_turn_takes_what_it_must_and_the_wait_is_half_of_it_in_the_mean(rpm, turn, wait):
    # 60 / rpm seconds; the wait is uniform over one turn.
    platters, rng = Platters(rpm=rpm), stream(1, "wait")
    waits = [platters.wait_ms(rng) for _ in range(40_000)]
    assert platters.turn_ms == pytest.approx(turn, abs=0.005)
    assert mean(waits) == pytest.approx(wait, abs=0.04)
    assert 0 <= min(waits) < 0.01 * turn
    assert 0.99 * turn < max(waits) < platters.turn_ms


def test_the_rim_of_a_95_mm_platter_at_7200_rpm_moves_at_36_metres_a_second():
    # About 35.8 m/s or 80 mph (common practice, no source).
    assert Platters(rpm=7_200).rim_speed == pytest.approx(35.8, abs=0.05)


def test_outer_tracks_pass_about_twice_the_data_of_inner_ones():
    # 2:1, in practice 1.7 to 2.2 (common practice, no source).
    platters = Platters()
    assert 1.7 <= platters.rate(0.0) / platters.rate(1.0) <= 2.2
    assert platters.radius_mm(0.0) == platters.outer_mm
    assert platters.radius_mm(1.0) == pytest.approx(platters.inner_mm)


@given(st.floats(0, 1), st.floats(0, 1))
def test_further_in_is_never_faster_and_a_longer_way_never_shorter(one, other):
    platters, (near, far) = Platters(), sorted((one, other))
    assert platters.rate(near) >= platters.rate(far)
    assert platters.seek_ms(near) <= platters.seek_ms(far)


def test_a_seek_between_random_places_takes_8_to_10_ms_in_the_mean():
    # 8 to 10 ms on desktop drives (common practice, no source).
    platters, rng = Platters(), stream(1, "seek")
    seeks = [platters.seek_ms(abs(rng.random() - rng.random())) for _ in range(20_000)]
    assert 8 <= mean(seeks) <= 10


def test_a_retry_costs_whole_turns_and_at_least_one():
    platters, rng = Platters(rpm=7_200), stream(1, "retry")
    turns = [platters.retry_ms(rng) / platters.turn_ms for _ in range(20_000)]
    assert all(turn == pytest.approx(round(turn)) and turn > 0.99 for turn in turns)
    assert mean(turns) == pytest.approx(2.0, rel=0.03)


@pytest.mark.parametrize(
    "mix",
    [
        RANDOM,
        Mix(size=4_096, sequential=0.3, cached=0.4, stroke=0.2, retried=0.02),
        Mix(size=4_096, sequential=0.3, cached=0.4, stroke=0.2, retried=0.2, again=0.4),
        Mix(size=524_288, sequential=0.95, cached=0.02, stroke=0.3, place=0.8),
    ],
)
def test_the_closed_form_of_the_service_time_is_what_single_requests_come_to(mix):
    platters, rng = Platters(), stream(1, "service")
    times = [platters.request_ms(rng, mix) for _ in range(60_000)]
    service = platters.service(mix)
    assert service.mean_ms == pytest.approx(mean(times), rel=0.02)
    assert service.variance == pytest.approx(pvariance(times), rel=0.06)
