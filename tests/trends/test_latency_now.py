from math import log

import pytest

from diskwatch.records import Direction
from diskwatch.trends import latency
from diskwatch.trends.latency_now import LATEST, latency_now
from diskwatch.trends.slowness import LEARNING, threshold
from tests.trends.traffic import invented_days


def lived(days):
    state = latency.begin()
    for rollups in days:
        for one in rollups:
            state = latency.arrive(state, one)
        state, _ = latency.close_day(state)
    return state


@pytest.fixture(scope="module")
def slowed():
    return lived(invented_days(3, 110, slower_from=90))


def test_a_drive_without_traffic_has_nothing_to_tell():
    now = latency_now(latency.begin(), Direction.READ)
    assert (now.evidence, now.usual_us, now.now_us, now.times, now.twice, now.seen_on) == (None,) * 6
    assert now.missing == LEARNING


def test_the_usual_time_is_the_geometric_mean_over_the_classes_of_work(slowed):
    now = latency_now(slowed, Direction.READ)
    assert now.classes == 3
    # Invented: 3, 5 and 7 ms by size.
    assert now.usual_us == pytest.approx(1000 * (3 * 5 * 7) ** (1 / 3), rel=0.1)


def test_what_takes_twice_as_long_is_told_as_twice(slowed):
    now = latency_now(slowed, Direction.READ)
    assert now.shift == pytest.approx(log(2), abs=0.1)
    assert now.usual_us is not None
    assert now.now_us == pytest.approx(2 * now.usual_us, rel=0.1)
    assert now.evidence is not None
    assert now.evidence > threshold(Direction.READ)
    assert now.onset is not None
    assert 190 <= now.onset <= 190 + LATEST


def test_a_forecast_is_asked_after_an_alarm_only(slowed):
    assert latency_now(slowed, Direction.READ).twice is not None
    assert latency_now(lived(invented_days(3, 80)), Direction.READ).twice is None


def test_whether_it_follows_heat_is_not_known_without_temperatures(slowed):
    assert latency_now(slowed, Direction.READ).follows_heat is None
