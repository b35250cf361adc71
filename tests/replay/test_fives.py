from hypothesis import given, strategies as st

from diskwatch.replay.fives import Fives
from diskwatch.replay.stretches import Stretch
from diskwatch.units import DAY


def stretch(at, seconds=10, reads=4, read_ms=20):
    return Stretch("INV1", at, seconds, (reads, 1, reads * 4096, 4096, read_ms, 2))


def gathered(stretches):
    """All days of some stretches."""
    fives, days = Fives(), []
    for one in stretches:
        days += fives.add(one)
    return [*days, *fives.rest()]


def test_short_stretches_become_five_minutes_that_cover_their_time():
    ((day, (rollup, second)),) = gathered(stretch(at) for at in range(10, 410, 10))
    assert day == 0
    assert (rollup.at, rollup.wall_seconds, rollup.covered_ms, rollup.spans) == (300, 300, 300_000, 30)
    assert (rollup.counts.reads, rollup.counts.read_ms) == (120, 600)
    assert (second.at, second.covered_ms) == (600, 100_000)


def test_a_stretch_of_five_minutes_or_more_stands_for_itself():
    ((_, (rollup,)),) = gathered([stretch(700, seconds=600)])
    assert (rollup.at, rollup.wall_seconds, rollup.covered_ms) == (700, 600, 600_000)


def test_the_largest_mean_of_a_short_stretch_is_kept():
    ((_, (rollup,)),) = gathered([stretch(10), stretch(20, reads=1, read_ms=1500), stretch(30, reads=0)])
    assert rollup.longest_read_us == 1_500_000


def test_a_day_is_over_when_the_next_one_begins():
    fives = Fives()
    assert fives.add(stretch(DAY - 290)) == []
    assert fives.add(stretch(DAY + 10)) == []
    ((day, rollups),) = fives.add(stretch(DAY + 700))
    assert (day, len(rollups)) == (0, 1)
    assert [(day, len(rollups)) for day, rollups in fives.rest()] == [(1, 2)]


@given(st.lists(st.tuples(st.integers(1, 200_000), st.integers(1, 900), st.integers(0, 9)), max_size=80))
def test_nothing_is_lost_and_no_day_comes_twice(life):
    at, stretches = 0, []
    for gap, seconds, reads in life:
        at += gap + seconds
        stretches.append(stretch(at, seconds=seconds, reads=reads))
    days = gathered(stretches)
    assert sum(one.counts.reads for _, rollups in days for one in rollups) == sum(
        x.counts[0] for x in stretches
    )
    assert [day for day, _ in days] == sorted({day for day, _ in days})
