from itertools import pairwise

import pytest
from hypothesis import given, strategies as st

from diskwatch.analyser.wearing import Wearing, carried
from tests.samples import DAY, NOON, NVME, read


def worn(*readings):
    """What is known after readings of (day, signals, powered hours)."""
    state = Wearing()
    for day, signals, hours in readings:
        reading = read(NOON + day * DAY, NVME, **signals).reading
        assert reading is not None
        state = carried(state, reading, at=NOON + day * DAY, hours=hours)
    return state


def test_a_drive_that_tells_no_wear_has_none():
    assert worn((0, {"temperature": 30}, None)) == Wearing()


def test_endurance_and_spare_are_followed_beside_each_other():
    state = worn(
        (0, {"percentage_used": 3, "available_spare": 100, "spare_threshold": 5, "data_written": 10}, None),
        (1, {"percentage_used": 4, "available_spare": 97, "spare_threshold": 5, "data_written": 30}, 24),
    )
    assert (state.endurance.percent, state.spare.percent) == (4, 3)
    assert (state.endurance.written, state.endurance.powered) == (20, 1.0)
    assert state.spare_threshold == 5


def test_a_threshold_that_is_not_told_again_stays_known():
    state = worn((0, {"available_spare": 100, "spare_threshold": 5}, None), (1, {"available_spare": 100}, None))
    assert state.spare_threshold == 5


def test_without_powered_hours_each_day_that_was_read_counts():
    state = worn(*((day, {"percentage_used": 3}, None) for day in (0, 0, 1, 5)))
    assert state.endurance.powered == 2


def test_a_clock_that_was_set_back_lets_no_day_come_twice():
    state = worn(*((day, {"percentage_used": 3}, None) for day in (10, 2, 3, 11)))
    assert (state.day - NOON // DAY, state.endurance.powered) == (11, 1)


@given(st.lists(st.tuples(st.integers(-50, 50), st.integers(0, 255), st.integers(0, 2**80)), max_size=30))
def test_whatever_a_drive_tells_nothing_is_invented(life):
    state = worn(*((day, {"percentage_used": used, "data_written": n}, None) for day, used, n in life))
    if life:
        assert state.endurance.percent == life[-1][1]
        assert state.endurance.written >= 0
        assert state.endurance.written == pytest.approx(
            sum(max(0, b[2] - a[2]) for a, b in pairwise(life)), rel=1e-6
        )
