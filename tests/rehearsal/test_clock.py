import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.clock import Clock


@given(st.lists(st.tuples(st.integers(1, 100_000), st.booleans()), max_size=30))
def test_no_moment_comes_twice_and_the_steady_clock_stands_still_while_it_is_off(steps):
    clock, seen, awake = Clock(1_000), [1_000], 0
    for seconds, on in steps:
        clock.forward(seconds, on=on)
        seen.append(clock.now())
        awake += seconds if on else 0
    assert seen == sorted(set(seen))
    assert clock.steady() == awake
    assert clock.days() == (seen[-1] - 1_000) / 86_400


@pytest.mark.parametrize("seconds", [0, -1])
def test_time_that_would_stand_still_or_go_back_is_refused(seconds):
    with pytest.raises(ValueError, match="forward"):
        Clock(0).forward(seconds)
