from functools import partial

import pytest
from hypothesis import given, strategies as st

from diskwatch.records import Direction
from diskwatch.trends.references import Reference
from diskwatch.trends.shift import Silence, by_class, day_medians, day_shift

WORK = st.lists(st.tuples(st.integers(0, 5), st.integers(-3000, 7000)), max_size=60)


def known(level, spread=0.08):
    return Reference(medians=(level,) * 12, level=level, spread=spread)


def shift(work, references):
    held, _ = day_shift(work, references, day=9, direction=Direction.READ, temperature=31.0)
    return held


def test_the_worked_example_of_five_classes():
    """Shifts .02, .10, .15, .30, -.05 with weights 12, 6, 12, 3, 9: the 30 % quantile is .02."""
    wanted = {0: (20, 12), 1: (100, 6), 2: (150, 12), 3: (300, 3), 4: (-50, 9)}
    work = [(cls, log) for cls, (log, count) in wanted.items() for _ in range(count)]
    held = shift(work, {cls: known(0.0) for cls in wanted})
    assert held.shift == pytest.approx(0.02)
    assert (held.rollups, held.classes, held.day, held.temperature) == (42, 5, 9, 31.0)
    assert held.silence is None


def test_more_than_twelve_roll_ups_of_a_class_add_no_weight():
    many = [(0, 500)] * 200 + [(1, 0)] * 12
    assert shift(many, {0: known(0.0), 1: known(0.0)}).shift == 0.0


def test_an_unsteady_class_weighs_little():
    work = [(0, 0)] * 12 + [(1, 500)] * 12
    assert shift(work, {0: known(0.0), 1: known(0.0)}).shift == 0.0
    assert shift(work, {0: known(0.0, 0.16), 1: known(0.0)}).shift == 0.5


def test_a_class_with_two_roll_ups_has_no_median():
    assert day_medians(by_class([(4, 10), (4, 30), (5, 1), (5, 2), (5, 30)])) == {5: 0.002}


@pytest.mark.parametrize(
    ("work", "references", "silence"),
    [
        ([(0, 0)] * 5 + [(1, 0)] * 4, {0: known(0.0), 1: known(0.0)}, Silence.LITTLE_TRAFFIC),
        ([(0, 0)] * 5 + [(1, 0)] * 5, {0: known(0.0)}, Silence.LEARNING),
        ([(0, 0)] * 5 + [(1, 0)] * 5, {0: known(0.0), 1: Reference(medians=(0.0,) * 11)}, Silence.LEARNING),
        ([(0, 0)] * 10, {0: known(0.0)}, Silence.FEW_CLASSES),
        ([(0, 0)] * 5 + [(1, 0)] * 5, {0: known(0.0, 0.2), 1: known(0.0, 0.2)}, Silence.LITTLE_WEIGHT),
    ],
)
def test_a_day_that_says_too_little_has_no_shift_and_says_why(work, references, silence):
    held = shift(work, references)
    assert held.shift is None
    assert held.silence is silence


@given(WORK, st.randoms(use_true_random=False))
def test_the_order_of_the_roll_ups_changes_nothing(work, shuffler):
    references = {cls: known(1.0, 0.08 + cls / 50) for cls in range(4)}
    mixed = list(work)
    shuffler.shuffle(mixed)
    held = partial(day_shift, references=references, day=1, direction=Direction.WRITE, temperature=None)
    assert held(mixed) == held(work)


@given(WORK, st.integers(-2000, 2000))
def test_another_unit_of_time_shifts_medians_and_references_alike(work, by):
    """Times in other units are logarithms moved by a constant: what compares stays the same."""
    here = {cls: known(1.0, 0.08 + cls / 50) for cls in range(4)}
    there = {cls: known(1.0 + by / 1000, 0.08 + cls / 50) for cls in range(4)}
    one, other = shift(work, here), shift([(cls, log + by) for cls, log in work], there)
    assert one.silence is other.silence
    assert other.shift == (None if one.shift is None else pytest.approx(one.shift, abs=1e-9))


@given(WORK)
def test_the_shift_is_that_of_one_of_the_classes_and_at_least_seventy_percent_of_the_weight_is_as_slow(work):
    references = {cls: known(1.0) for cls in range(6)}
    held, medians = day_shift(work, references, day=1, direction=Direction.READ, temperature=None)
    if held.shift is None:
        return
    weights = {cls: min(12, len(by_class(work)[cls])) for cls in medians}
    as_slow = sum(weight for cls, weight in weights.items() if medians[cls] - 1.0 >= held.shift)
    assert held.shift in {one - 1.0 for one in medians.values()}
    assert as_slow >= 0.7 * sum(weights.values()) * (1 - 1e-9)
