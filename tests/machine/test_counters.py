from dataclasses import astuple, replace
from pathlib import Path
from types import SimpleNamespace

import psutil
import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.counters import counts, difference, instance_of, together, traffic
from diskwatch.machine.protocol import Counted
from diskwatch.records import IoCounts
from tests.machine.trees import Tree

WRAP = 2**32
START = IoCounts(
    reads=100, writes=200, read_bytes=4096, write_bytes=8192, read_ms=1000, write_ms=2000, busy_ms=1500
)
small = st.integers(min_value=0, max_value=10**6)
totals = st.builds(
    IoCounts,
    reads=small,
    writes=small,
    read_bytes=small,
    write_bytes=small,
    read_ms=small,
    write_ms=small,
    busy_ms=small,
)


def look(counts: IoCounts, instance: str = "boot a, disk 1") -> Counted:
    return Counted(counts=counts, instance=instance)


def plus(a: IoCounts, b: IoCounts) -> IoCounts:
    return IoCounts(
        reads=a.reads + b.reads,
        writes=a.writes + b.writes,
        read_bytes=a.read_bytes + b.read_bytes,
        write_bytes=a.write_bytes + b.write_bytes,
        read_ms=a.read_ms + b.read_ms,
        write_ms=a.write_ms + b.write_ms,
        busy_ms=a.busy_ms + b.busy_ms,
    )


@given(totals, totals)
def test_a_difference_added_to_the_earlier_look_gives_the_later(old: IoCounts, change: IoCounts):
    assert difference(look(old), look(plus(old, change))) == change


@given(totals, totals)
def test_a_difference_is_never_negative_and_a_fall_gives_none(old: IoCounts, new: IoCounts):
    found = difference(look(old), look(new))
    fell = any(after < before for before, after in zip(astuple(old), astuple(new), strict=True))
    assert (found is None) == fell
    assert found is None or min(astuple(found)) >= 0


def test_another_instance_is_never_subtracted():
    assert difference(look(START, "boot a, disk 1"), look(START, "boot a, disk 2")) is None
    assert difference(look(START, "boot a, disk 1"), look(START, "boot b, disk 1")) is None


def test_a_time_that_passed_its_range_is_made_whole():
    old = replace(START, read_ms=WRAP - 400, write_ms=WRAP - 10, busy_ms=WRAP - 5)
    new = replace(old, reads=150, writes=203, read_ms=600, write_ms=20, busy_ms=995)
    expected = IoCounts(
        reads=50, writes=3, read_bytes=0, write_bytes=0, read_ms=1000, write_ms=30, busy_ms=1000
    )
    assert difference(look(old), look(new)) == expected
    assert difference(look(old), look(new), elapsed=10.0) == expected


def test_a_time_that_fell_without_requests_did_not_pass_its_range():
    old = replace(START, read_ms=WRAP - 400)
    assert difference(look(old), look(replace(old, read_ms=600))) is None


def test_a_time_that_fell_too_far_back_for_the_time_gone_by_is_a_new_start():
    old = replace(START, busy_ms=WRAP - 5)
    new = replace(old, busy_ms=60_000)
    assert difference(look(old), look(new), elapsed=10.0) is None
    assert difference(look(old), look(new), elapsed=60.0) is not None


def test_requests_can_bring_together_no_more_time_than_a_full_queue_has_in_the_time_gone_by():
    old = replace(START, read_ms=WRAP - 10**8)
    new = replace(old, reads=100 + 10**6, read_ms=0)
    assert difference(look(old), look(new), elapsed=10.0) is None
    assert difference(look(old), look(new), elapsed=60.0) is not None
    assert difference(look(old), look(new)) is not None
    assert difference(look(START), look(replace(new, read_ms=999))) is None


def test_namespaces_are_summed_but_are_not_busy_one_after_the_other():
    other = replace(START, reads=1, busy_ms=700)
    assert together((START, other)) == IoCounts(
        reads=101, writes=400, read_bytes=8192, write_bytes=16384, read_ms=2000, write_ms=4000, busy_ms=1500
    )


def test_a_drive_has_traffic_only_where_all_of_it_was_seen_twice():
    old = {"nvme0n1": look(START), "nvme0n2": look(START, "boot a, disk 2")}
    later = plus(START, replace(START, busy_ms=10))
    new = {"nvme0n1": look(later), "nvme0n2": look(later, "boot a, disk 2")}
    found = traffic(("nvme0n1", "nvme0n2"), old, new)
    assert found is not None
    assert (found.reads, found.busy_ms) == (200, 10)
    assert traffic(("nvme0n1", "nvme0n3"), old, new) is None
    assert traffic(("nvme0n2",), {}, new) is None
    assert traffic((), old, new) is None
    assert traffic(("nvme0n1",), old, {"nvme0n1": look(later, "boot a, disk 9")}) is None


def test_an_instance_is_the_boot_and_the_disks_number_or_else_its_name_and_size(tree: Tree):
    place = tree.sata(sectors=1000)
    assert instance_of(tree.sys, "b", "sda") == "boot b, disk 1"
    (place / "diskseq").unlink()
    assert instance_of(tree.sys, "b", "sda") == "boot b, sda of 1000 sectors"


def test_only_whole_disks_are_counted(tree: Tree, monkeypatch: pytest.MonkeyPatch):
    disk = tree.sata()
    tree.partition(disk, "sda1", "8:1")
    tree.stacked("dm-0", "253:0", disk)
    total = SimpleNamespace(
        read_count=1, write_count=2, read_bytes=3, write_bytes=4, read_time=5, write_time=6, busy_time=7
    )

    def told(*, perdisk: bool, nowrap: bool) -> dict[str, SimpleNamespace]:
        assert perdisk
        assert not nowrap
        return dict.fromkeys(("sda", "sda1", "dm-0"), total)

    monkeypatch.setattr(psutil, "disk_io_counters", told)
    assert counts(tree.sys, tree.proc) == {
        "sda": Counted(
            counts=IoCounts(reads=1, writes=2, read_bytes=3, write_bytes=4, read_ms=5, write_ms=6, busy_ms=7),
            instance="boot 11111111-2222-3333-4444-555555555555, disk 1",
        )
    }


@pytest.mark.parametrize("error", [NotImplementedError("none"), OSError(2, "gone"), ValueError("odd line")])
def test_a_kernel_without_counters_counts_nothing(
    tree: Tree, monkeypatch: pytest.MonkeyPatch, error: Exception
):
    def refuse(**_: bool) -> None:
        raise error

    monkeypatch.setattr(psutil, "disk_io_counters", refuse)
    assert counts(tree.sys, tree.proc) == {}


def test_the_counts_of_this_computer_lie_between_two_looks_at_diskstats():
    # Fields by position as Documentation/admin-guide/iostats.rst numbers them; sectors are always 512 bytes.
    def by_hand() -> dict[str, tuple[int, ...]]:
        lines = [line.split() for line in Path("/proc/diskstats").read_text(encoding="ascii").splitlines()]
        return {
            line[2]: (
                int(line[3]),
                int(line[7]),
                int(line[5]) * 512,
                int(line[9]) * 512,
                int(line[6]),
                int(line[10]),
                int(line[12]),
            )
            for line in lines
        }

    before, found, after = by_hand(), counts(), by_hand()
    if not found:
        pytest.skip("this computer shows no physical disk")
    for name, counted in found.items():
        for low, value, high in zip(before[name], astuple(counted.counts), after[name], strict=True):
            assert low <= value <= high
