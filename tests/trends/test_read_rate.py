import pytest
from hypothesis import given, strategies as st

from diskwatch.records import IoCounts, IoRollup
from diskwatch.trends.read_rate import read_rate

FIVE = 300_000


def rollup(rate=100e6, *, busy=0.9, share=1.0, size=512 * 1024, covered=FIVE, reset=False):
    """Five minutes in which a drive gave so many bytes a second while it was busy."""
    busy_ms = round(covered * busy)
    read = round(rate * busy_ms / 1000)
    counts = IoCounts(
        reads=read // size,
        writes=1,
        read_bytes=read,
        write_bytes=round(read / share) - read,
        read_ms=busy_ms,
        write_ms=0,
        busy_ms=busy_ms,
    )
    return IoRollup(
        drive=1,
        at=FIVE // 1000,
        wall_seconds=300,
        covered_ms=covered,
        counts=counts,
        longest_read_us=None,
        longest_write_us=None,
        spans=30,
        reset=reset,
    )


def test_the_rate_is_what_the_drive_gave_while_it_was_busy():
    found = read_rate([rollup(), rollup(busy=0.6), rollup(busy=1.0)], turns=False)
    assert found is not None
    assert (found.low, found.high) == pytest.approx((100e6, 100e6), rel=1e-6)
    assert found.stretches == 3


@pytest.mark.parametrize(
    "odd",
    [
        rollup(1e9, busy=0.4),
        rollup(1e9, share=0.7),
        rollup(1e9, size=16 * 1024),
        rollup(1e9, covered=FIVE // 2),
        rollup(1e9, reset=True),
        rollup(0.0),
    ],
)
def test_stretches_that_are_no_bulk_reading_tell_nothing(odd):
    assert read_rate([rollup(), rollup(), odd], turns=False) is None
    found = read_rate([rollup(), rollup(), rollup(), odd], turns=False)
    assert found is not None
    assert found.high == pytest.approx(100e6, rel=1e-6)


def test_a_drive_with_platters_is_taken_to_halve_at_the_inner_tracks():
    found = read_rate([rollup()] * 5, turns=True)
    assert found is not None
    assert (found.low, found.high) == pytest.approx((50e6, 100e6), rel=1e-6)


def test_a_few_odd_stretches_do_not_stretch_the_interval():
    rates = [rollup(rate) for rate in (1e6, *[100e6] * 18, 900e6)]
    found = read_rate(rates, turns=False)
    assert found is not None
    assert (found.low, found.high) == pytest.approx((100e6, 100e6), rel=1e-6)


@given(rates=st.lists(st.floats(1e6, 1e9), min_size=3, max_size=40), turns=st.booleans())
def test_the_interval_lies_within_what_was_given_whatever_the_order(rates, turns):
    found = read_rate([rollup(rate) for rate in rates], turns=turns)
    again = read_rate([rollup(rate) for rate in reversed(rates)], turns=turns)
    assert found is not None
    assert found == again
    assert found.low <= found.high <= max(rates) * 1.000001
    assert found.low >= min(rates) * 0.999999 / (2 if turns else 1)
