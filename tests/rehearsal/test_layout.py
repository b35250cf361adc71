import pytest
from hypothesis import given, strategies as st

from diskwatch.rehearsal.chance import stream
from diskwatch.rehearsal.layout import Layout
from diskwatch.rehearsal.rotating import Platters

LAYOUT = Layout(capacity=4 * 10**12, platters=Platters())


def test_a_drive_has_a_head_for_each_terabyte_and_all_serve_alike():
    assert LAYOUT.heads == 4
    rng, count = stream(1, "heads"), 20_000
    heads = [LAYOUT.head(rng.randrange(LAYOUT.units)) for _ in range(count)]
    for head in range(4):
        assert heads.count(head) / count == pytest.approx(0.25, abs=0.02)


def test_an_outer_track_holds_about_twice_as_many_sectors_as_an_inner_one():
    # A turn of 8.33 ms at 210 MB/s passes 1.75 MB, 427 physical sectors.
    assert LAYOUT.track(0) == 427
    assert 1.7 <= LAYOUT.track(0) / LAYOUT.track(LAYOUT.units - 1) <= 2.2


@given(st.integers(0, 10_000), st.integers(0, 3), st.floats(0, 1), st.floats(0, 1))
def test_a_place_under_a_head_lies_under_it(seed, head, one, other):
    begin, end = sorted((one, other))
    unit = LAYOUT.anywhere(stream(seed, "place"), head, begin, end)
    assert 0 <= unit < LAYOUT.units
    if end < 0.99:
        assert LAYOUT.head(unit) == head
        assert begin - 0.01 <= unit / LAYOUT.units <= end + 0.01


@given(st.integers(0, LAYOUT.units - 1), st.integers(0, 1_000))
def test_neighbours_lie_under_the_same_head_on_the_same_or_the_next_track(unit, seed):
    beside = LAYOUT.beside(stream(seed, "beside"), unit)
    assert LAYOUT.head(beside) == LAYOUT.head(unit)
    assert abs(beside - unit) in {0, 1, LAYOUT.track(unit)}
