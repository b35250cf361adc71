from dataclasses import replace
from math import log

import pytest
from hypothesis import given, strategies as st

from diskwatch.trends.today import Today, arrived, day_of, over, packed, unpacked
from diskwatch.units import DAY
from tests.trends.traffic import rollup


def taken(*rollups):
    today = Today()
    for one in rollups:
        today = arrived(today, one)
    return today


def test_reads_and_writes_are_gathered_with_class_and_thousandfold_logarithm():
    today = taken(rollup(300, 300, 30, read_ms=6, write_ms=2))
    assert [round(1000 * log(6))] == [log_ for _, log_ in unpacked(today.reads)]
    assert [round(1000 * log(2))] == [log_ for _, log_ in unpacked(today.writes)]
    assert (today.day, today.until, today.busy_until) == (0, 300, 300)


def test_a_roll_up_belongs_to_the_day_that_it_begins_on():
    assert day_of(rollup(DAY)) == 0
    assert day_of(rollup(DAY + 300)) == 1


@pytest.mark.parametrize(
    "bad",
    [
        rollup(600, covered=0.79),
        rollup(600, reset=True),
        rollup(600, reads=0, writes=0),
    ],
)
def test_what_cannot_be_compared_is_left_out_but_its_time_is_past(bad):
    today = taken(rollup(300), bad)
    assert today.reads == taken(rollup(300)).reads
    assert today.until == 600


def test_what_is_impossible_changes_nothing():
    today = taken(rollup(300))
    fine = rollup(600)
    for field in ("reads", "writes", "read_bytes", "write_bytes", "read_ms", "write_ms"):
        bad = replace(fine, counts=replace(fine.counts, **{field: -1}))
        assert arrived(today, bad) is today
    assert arrived(today, rollup(600, wall=59)) is today
    assert arrived(today, rollup(600, wall=0)) is today
    assert arrived(today, rollup(600, wall=-300)) is today


def test_the_same_roll_up_twice_counts_once_and_so_does_an_overlap():
    once = taken(rollup(300), rollup(600))
    assert arrived(once, rollup(600)) is once
    assert arrived(once, rollup(700)) is once
    assert arrived(once, rollup(300)) is once


def test_a_roll_up_of_a_closed_day_is_not_lived_again():
    closed = over(taken(rollup(DAY - 300)))
    assert arrived(closed, rollup(DAY - 600)) is closed


def test_a_clock_that_was_set_back_by_days_begins_the_day_anew():
    today = taken(rollup(40 * DAY + 300), rollup(40 * DAY + 600), rollup(3 * DAY + 300))
    assert today == taken(rollup(3 * DAY + 300))


def test_a_later_day_is_refused_until_the_open_one_is_closed():
    today = taken(rollup(300))
    with pytest.raises(ValueError, match="day 1 came while day 0 is open"):
        arrived(today, rollup(DAY + 300))
    assert arrived(over(today), rollup(DAY + 300)).day == 1


def test_the_wait_for_a_spin_up_is_left_out():
    rest = 9 * 300
    slow = rollup(300 + rest, longest_us=4_000_000)
    assert taken(rollup(300), slow).reads == taken(rollup(300)).reads
    assert taken(slow).reads == b""
    idle = rollup(600, reads=0)
    assert taken(rollup(300), idle, rollup(900, longest_us=4_000_000)).reads == taken(rollup(300)).reads


def test_a_slow_read_of_a_busy_drive_is_no_spin_up():
    today = taken(rollup(300), rollup(600, longest_us=4_000_000))
    assert len(unpacked(today.reads)) == 2
    quick = taken(rollup(300), rollup(30_000, longest_us=999_999))
    assert len(unpacked(quick.reads)) == 2


def test_after_a_spin_up_the_drive_counts_as_awake():
    today = taken(rollup(300, longest_us=4_000_000), rollup(600, longest_us=4_000_000))
    assert len(unpacked(today.reads)) == 1


@given(st.integers(0, 119), st.integers(0, 2**60), st.integers(1, 10**9))
def test_packing_keeps_class_and_time_to_half_a_thousandth(of_class, spent, operations):
    ((kept, thousandfold),) = unpacked(packed(of_class, spent, operations))
    assert kept == of_class
    assert thousandfold == pytest.approx(min(32767, 1000 * log(max(spent, 0.5) / operations)), abs=0.5)


def test_times_below_a_millisecond_altogether_are_half_a_millisecond_not_none():
    assert unpacked(packed(1, 0, 10)) == ((1, round(1000 * log(0.05))),)
