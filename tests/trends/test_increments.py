from hypothesis import given, strategies as st

from diskwatch.trends.increments import step

COUNTS = st.integers(min_value=0, max_value=2**64)


@given(old=COUNTS, new=COUNTS, may_fall=st.booleans())
def test_a_rise_is_the_difference_and_a_fall_invents_nothing(old, new, may_fall):
    moved = step(old, new, may_fall=may_fall)
    assert moved.rise == max(0, new - old)
    assert moved.reset == (new < old and not may_fall)


def test_a_falling_pending_count_is_no_reset_but_a_falling_crc_count_is():
    assert not step(8, 0, may_fall=True).reset
    assert step(8, 0, may_fall=False).reset
