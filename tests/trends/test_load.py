import pytest
from hypothesis import given, strategies as st

from diskwatch.records import Direction, IoCounts, IoRollup
from diskwatch.trends.load import CLASSES, class_days, load_class

READ, WRITE = Direction.READ, Direction.WRITE


def rollup(reads=300, writes=0, *, read_size=4096, write_size=4096, seconds=300.0, ms=6, reset=False):
    return IoRollup(
        drive=1,
        at=300,
        wall_seconds=300,
        covered_ms=round(seconds * 1000),
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=reads * read_size,
            write_bytes=writes * write_size,
            read_ms=reads * ms,
            write_ms=writes * ms,
            busy_ms=0,
        ),
        longest_read_us=None,
        longest_write_us=None,
        spans=30,
        reset=reset,
    )


counted = st.integers(0, 10**7)
vast = st.integers(0, 2**50)
rollups = st.builds(
    IoRollup,
    drive=st.just(1),
    at=st.just(300),
    wall_seconds=st.just(300),
    covered_ms=st.integers(0, 320_000),
    counts=st.builds(
        IoCounts,
        reads=counted,
        writes=counted,
        read_bytes=vast,
        write_bytes=vast,
        read_ms=vast,
        write_ms=vast,
        busy_ms=vast,
    ),
    longest_read_us=st.none(),
    longest_write_us=st.none(),
    spans=st.just(30),
    reset=st.booleans(),
)


def test_there_are_a_hundred_and_twenty_classes():
    assert CLASSES == 120


def test_every_cut_parts_two_classes_and_nothing_else_does():
    rates = [rollup(round(300 * per_second)) for per_second in (0.99, 1, 3.99, 4, 15.9, 16, 63, 64, 500)]
    assert [(load_class(one, READ) or 0) // 24 for one in rates] == [0, 1, 1, 2, 2, 3, 3, 4, 4]
    sizes = [rollup(read_size=size) for size in (512, 4096, 8191, 8192, 2**18, 2**19, 2**22)]
    assert [(load_class(one, READ) or 0) % 24 // 3 for one in sizes] == [0, 0, 0, 1, 6, 7, 7]
    shares = [rollup(reads, 300 - reads) for reads in (1, 99, 100, 199, 200, 300)]
    assert [(load_class(one, READ) or 0) % 3 for one in shares] == [0, 0, 1, 1, 2, 2]


def test_writes_are_classed_by_the_size_of_writes():
    mixed = rollup(150, 150, read_size=4096, write_size=2**16)
    assert load_class(mixed, WRITE) == (load_class(mixed, READ) or 0) + 4 * 3


def test_busy_time_and_slowness_change_no_class():
    assert load_class(rollup(ms=500), READ) == load_class(rollup(ms=1), READ)


@pytest.mark.parametrize("one", [rollup(0), rollup(seconds=239), rollup(reset=True), rollup(seconds=0)])
def test_what_says_too_little_takes_no_part(one):
    assert load_class(one, READ) is None
    assert class_days([one]) == ()


@given(rollups)
def test_a_class_is_one_of_all_or_none(one):
    for direction in Direction:
        assert load_class(one, direction) in {None, *range(CLASSES)}


@given(st.lists(rollups, max_size=8))
def test_every_stretch_that_takes_part_is_counted_once(day):
    for direction in Direction:
        took_part = [one for one in day if load_class(one, direction) is not None]
        found = [one for one in class_days(day) if one.direction is direction]
        assert sum(one.rollups for one in found) == len(took_part)
        assert sum(sum(one.histogram.values()) for one in found) == len(took_part)
        assert sum(one.operations for one in found) == sum(one.operations(direction) for one in took_part)


def test_the_order_of_the_stretches_changes_nothing():
    day = [rollup(300, 40, ms=5), rollup(3000), rollup(300, 40, ms=1)]
    assert class_days(day) == class_days(day[::-1])
