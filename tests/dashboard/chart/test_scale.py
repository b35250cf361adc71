from hypothesis import given, strategies as st

from diskwatch.dashboard.chart.scale import Scale, scale_of

VALUES = st.lists(st.floats(0, 1e12), min_size=1, max_size=30)


def test_counts_that_leap_are_told_apart_by_powers_of_ten():
    scale = scale_of([0.0, 1.0, 2.0, 3.0, 4.0, 5_000.0], whole=True)
    assert scale.tens
    assert scale.share(0) == 0
    assert scale.marks(9) == (0, 1, 10, 100, 1_000)


def test_what_moves_evenly_keeps_even_steps():
    scale = scale_of([30.0, 35.0, 40.0], whole=False)
    assert not scale.tens
    assert scale.marks(4) == (30, 35, 40)


def test_a_count_that_moves_by_little_far_from_nothing_keeps_even_steps():
    assert not scale_of([91.0, 92.0, 92.0, 92.0], whole=True).tens


def test_a_value_that_stands_still_has_room_above_it():
    scale = scale_of([7.0, 7.0], whole=True)
    assert scale.share(7.0) == 0
    assert scale.high > 7


def test_no_values_give_a_scale_all_the_same():
    assert scale_of([], whole=True) == Scale(low=0.0, high=1.0)


@given(VALUES, st.booleans())
def test_every_value_has_its_place_and_a_larger_one_is_never_lower(values, whole):
    scale = scale_of(values, whole=whole)
    shares = [scale.share(value) for value in sorted(values)]
    assert shares == sorted(shares)
    assert all(-1e-9 <= share <= 1 + 1e-9 for share in shares)


@given(VALUES, st.booleans(), st.integers(2, 12))
def test_marks_lie_within_and_there_are_no_more_than_have_room(values, whole, most):
    scale = scale_of(values, whole=whole)
    marks = scale.marks(most)
    assert 1 <= len(marks) <= max(most, 2)
    assert list(marks) == sorted(marks)
