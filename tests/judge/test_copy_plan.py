from dataclasses import replace
from decimal import Decimal, getcontext

import pytest
from hypothesis import given, strategies as st

from diskwatch.judge.copy_plan import ERROR_RATES, Holds, chance_of_one, copy_plan, is_turning, unreadable
from diskwatch.records import DriveLine, Kind, Mount, Place, SignalNow
from diskwatch.records.owner import OwnerFacts
from diskwatch.trends.read_rate import ReadRate
from tests.samples import HDD, NOON, NVME, SSD, VIRTUAL

TB = 10**12
RATE = ReadRate(low=100e6, high=200e6, stretches=12)


def line(*mounts, drive=HDD, signals=(), backed_up=None):
    return DriveLine(
        number=1,
        drive=drive,
        place=Place(device="/dev/sda", bay=None, lives_here=mounts),
        label=None,
        first_seen=NOON,
        last_pass=None,
        call=None,
        signals=tuple(
            SignalNow(name=name, value=value, unit="sectors", since=NOON, evidence=None)
            for name, value in signals
        ),
        owner=OwnerFacts(backed_up=backed_up),
    )


def plan(of, **given):
    return copy_plan(of, **{"rate": RATE, "arrays": (), **given})


@pytest.mark.parametrize(
    ("terabytes", "rate", "chance", "digits"),
    [
        # "Why RAID 5 Stops Working in 2009 - Not", high-rely.com, 13 August 2012: 3 TB at 1 in 10^14.
        (3, 1e-14, 0.213, 3),
        # Our own table in the trade notes, computed apart from this code, for 1 in 10^14 and 1 in 10^15.
        (1, 1e-14, 0.077, 3),
        (4, 1e-14, 0.274, 3),
        (12, 1e-14, 0.617, 3),
        (20, 1e-14, 0.798, 3),
        (1, 1e-15, 0.008, 3),
        (8, 1e-15, 0.062, 3),
        (20, 1e-15, 0.148, 3),
    ],
)
def test_the_chance_of_an_unreadable_sector_is_that_of_published_worked_figures(
    terabytes, rate, chance, digits
):
    assert round(chance_of_one(rate, terabytes * 8 * TB), digits) == chance


def test_as_many_bits_as_one_error_comes_in_are_a_chance_of_63_percent():
    # howtospotapsychopath.com on the same article: one in 12 Tb over 12 Tb is 63.2 %, not a certainty.
    assert round(chance_of_one(1 / 12e12, 12 * 10**12), 3) == 0.632


@given(rate=st.sampled_from([1e-14, 1e-15, 1e-16, 1e-17]), count=st.integers(1, 10**16))
def test_the_arithmetic_is_exact_where_a_plain_power_would_lose_all_digits(rate, count):
    getcontext().prec = 60
    exact = 1 - ((1 - Decimal(rate)).ln() * count).exp()
    assert chance_of_one(rate, count) == pytest.approx(float(exact), rel=1e-12)


def test_a_class_gives_an_interval_and_what_is_not_known_gives_none():
    found = unreadable(Kind.HDD, 4 * TB)
    assert found is not None
    assert found.bits == 32 * TB
    assert found.chances == pytest.approx((0.0315, 0.2739), abs=1e-4)
    assert unreadable(Kind.HDD, None) is None
    assert unreadable(Kind.VIRTUAL, TB) is None
    assert set(ERROR_RATES) == set(Kind) - {Kind.VIRTUAL}


def test_what_cannot_be_replaced_comes_first_and_swap_last():
    mounts = [
        Mount(point="swap", used_bytes=0, total_bytes=8_000_000_000),
        Mount(point="/", used_bytes=30_000_000_000, total_bytes=TB),
        Mount(point="/boot/efi", used_bytes=6_000_000, total_bytes=10**9),
        Mount(point="/srv/films", used_bytes=2 * TB, total_bytes=3 * TB),
        Mount(point="/srv/notes", used_bytes=10**9, total_bytes=3 * TB),
        Mount(point="/srv/unknown"),
        Mount(point="/home", used_bytes=TB, total_bytes=2 * TB),
    ]
    made = plan(line(*mounts), homes={"/home"}, history="/")
    points = [one.mount.point for one in made.held]
    assert points == ["/home", "/srv/notes", "/srv/films", "/srv/unknown", "/boot/efi", "/", "swap"]
    assert made.held[0].holds == (Holds.HOME, Holds.DATA)
    assert made.held[5].holds == (Holds.SYSTEM, Holds.HISTORY)
    assert made.used_bytes == sum(mount.used_bytes or 0 for mount in mounts)
    assert made.incomplete


def test_a_home_within_the_system_makes_the_system_come_first():
    made = plan(line(Mount(point="/", used_bytes=TB), Mount(point="/srv", used_bytes=1)), homes={"/"})
    assert [one.mount.point for one in made.held] == ["/", "/srv"]


def test_times_are_an_interval_from_the_rate_that_was_given():
    made = plan(line(Mount(point="/srv", used_bytes=TB, total_bytes=2 * TB)))
    assert made.hours == pytest.approx((TB / 200e6 / 3600, TB / 100e6 / 3600))
    assert made.whole_hours == pytest.approx((4 * TB / 200e6 / 3600, 4 * TB / 100e6 / 3600))
    assert made.rate.stretches == 12


def test_without_a_measured_rate_the_sorts_usual_one_is_taken_and_marked_as_such():
    for drive in (HDD, SSD, NVME, VIRTUAL):
        made = plan(line(drive=drive), rate=None)
        assert made.rate.stretches == 0
        assert 0 < made.rate.low < made.rate.high


def test_what_is_not_known_stays_unknown():
    made = copy_plan(line(Mount(point="/srv"), drive=replace(HDD, capacity_bytes=None)), rate=None, arrays=None)
    assert (made.used_bytes, made.hours, made.whole_hours, made.unreadable) == (None, None, None, None)
    assert (made.pending, made.arrays, made.backed_up, made.call) == (None, None, None, None)
    assert made.incomplete


def test_sectors_that_wait_are_the_larger_of_two_counts_of_the_same():
    counts = [("pending-sectors", 8), ("offline-uncorrectable", 9), ("reallocated-sectors", 100)]
    assert plan(line(signals=counts)).pending == 9
    assert plan(line(signals=[("pending-sectors", None)])).pending is None
    assert plan(line(signals=[("pending-sectors", 0)])).pending == 0


def test_a_drive_turns_where_it_says_so_or_is_a_hard_disk():
    assert is_turning(line(drive=replace(HDD, rotation_rpm=None)))
    assert is_turning(line(drive=replace(HDD, kind=Kind.USB)))
    assert not is_turning(line(drive=replace(HDD, kind=Kind.USB, rotation_rpm=None)))
    assert not is_turning(line(drive=NVME))
