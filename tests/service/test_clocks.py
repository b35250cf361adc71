import pytest
from hypothesis import given, strategies as st

from diskwatch.service.clocks import JUMP, ClockGuard, Clocks


class Hands:
    """Clocks that a test moves."""

    def __init__(self):
        self.wall, self.steady, self.awake = 1.8e9, 500.0, 400.0

    def __call__(self):
        return Clocks(wall=self.wall, steady=self.steady, awake=self.awake)

    def pass_(self, seconds, *, slept=0.0, set_by=0.0):
        self.wall += seconds + slept + set_by
        self.steady += seconds + slept
        self.awake += seconds


@pytest.mark.parametrize(
    ("slept", "set_by", "told"),
    [
        (0, 3600, "The clock was set forward by 1 hour; the next rounds were planned anew."),
        (0, -86400, "The clock was set back by 1 day; the next rounds were planned anew."),
        (28800, 0, "The machine slept for 8 hours; the next rounds were planned anew."),
        (
            60,
            -90,
            "The machine slept for 1 minute and the clock was set back by 1 minute; the next rounds were",
        ),
    ],
)
def test_what_happened_to_the_clocks_is_told_in_one_sentence(slept, set_by, told):
    hands = Hands()
    guard = ClockGuard(hands)
    hands.pass_(30, slept=slept, set_by=set_by)
    moved = guard.look()
    assert moved is not None
    assert moved.sentence().startswith(told)
    hands.pass_(30)
    assert guard.look() is None


@given(st.floats(0, 1e6), st.floats(-JUMP + 0.01, JUMP - 0.01))
def test_time_that_passes_and_what_ntp_corrects_are_nothing(seconds, drift):
    hands = Hands()
    guard = ClockGuard(hands)
    hands.pass_(seconds, set_by=drift)
    assert guard.look() is None


@given(st.floats(JUMP + 1, 1e9), st.floats(JUMP + 1, 1e9), st.booleans())
def test_sleep_and_a_clock_that_is_set_are_told_apart(slept, set_by, back):
    hands = Hands()
    guard = ClockGuard(hands)
    hands.pass_(30, slept=slept, set_by=-set_by if back else set_by)
    moved = guard.look()
    assert moved is not None
    assert moved.slept == pytest.approx(slept, abs=0.01)
    assert moved.set_by == pytest.approx(-set_by if back else set_by, abs=0.01)
