from math import cos, exp

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.roots import rising_root, root


@given(where=st.floats(-50, 50), power=st.sampled_from([1, 3, 5]))
def test_the_crossing_of_an_odd_power_is_found(where, power):
    assert root(lambda x: (x - where) ** power, -60, 61) == pytest.approx(
        where, abs=1e-9 if power == 1 else 1e-3
    )


def test_the_point_that_its_own_cosine_is_comes_out_to_the_last_digits():
    """Dottie's number, 0.7390851332151607 (from memory)."""
    assert root(lambda x: x - cos(x), 0, 1) == pytest.approx(0.7390851332151607, rel=1e-13)


def test_an_end_that_is_the_crossing_is_the_answer():
    assert root(lambda x: x, 0, 5) == 0
    assert root(lambda x: x - 5, 0, 5) == 5


def test_ends_of_the_same_sign_are_refused():
    with pytest.raises(ValueError, match="no change of sign"):
        root(lambda x: x * x + 1, -1, 1)


@given(where=st.floats(-1e6, 1e6), start=st.floats(-1e3, 1e3))
def test_a_crossing_far_from_the_guess_is_found_in_either_direction(where, start):
    assert rising_root(lambda x: x - where, start) == pytest.approx(where, abs=1e-6)


def test_a_guess_that_is_the_crossing_stays():
    assert rising_root(lambda x: x - 3, 3) == 3


def test_a_function_that_never_crosses_is_refused():
    with pytest.raises(ValueError, match="no crossing"):
        rising_root(lambda x: -1 - exp(-abs(x)), 0)
