import os
import threading
from dataclasses import astuple, fields, replace
from pathlib import Path
from types import SimpleNamespace

import psutil
import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.counters import completed, counts, difference, instance_of, together, traffic
from diskwatch.machine.protocol import Counted
from diskwatch.records import IoCounts
from tests.machine.trees import Tree

WRAP = 2**32
START = IoCounts(
    reads=100, writes=200, read_bytes=4096, write_bytes=8192, read_ms=1000, write_ms=2000, busy_ms=1500
)
NAMES = tuple(field.name for field in fields(IoCounts))
small = st.integers(min_value=0, max_value=10**6)
full = st.builds(IoCounts, **dict.fromkeys(NAMES, small))
old_kernels = st.builds(IoCounts, **dict.fromkeys(NAMES[:7], small))
totals = full | old_kernels


def look(counts: IoCounts, instance: str = "boot a, disk 1") -> Counted:
    return Counted(counts=counts, instance=instance)


def made(*numbers: int | None) -> IoCounts:
    """Counts by position; what is left out at the end is not known."""
    return IoCounts(**dict(zip(NAMES, numbers, strict=False)))  # type: ignore[arg-type]  # the first seven are whole


def told(counts: IoCounts) -> list[int]:
    return [number for number in astuple(counts) if number is not None]


def plus(a: IoCounts, b: IoCounts) -> IoCounts:
    pairs = zip(astuple(a), astuple(b), strict=True)
    return made(*(None if x is None or y is None else x + y for x, y in pairs))


@given(totals, totals)
def test_a_difference_added_to_the_earlier_look_gives_the_later(old: IoCounts, change: IoCounts):
    later = plus(old, change)
    found = difference(look(old), look(later))
    assert found is not None
    assert plus(old, found) == later
    assert told(found) == told(change)[: len(told(found))]


@given(totals, totals)
def test_a_difference_is_never_negative_and_a_fall_gives_none(old: IoCounts, new: IoCounts):
    found = difference(look(old), look(new))
    pairs = {name: (getattr(old, name), getattr(new, name)) for name in NAMES}
    fell = {name for name, pair in pairs.items() if None not in pair and pair[1] < pair[0]}
    assert (found is None) == bool(fell - {"discard_ms", "flush_ms"})
    assert found is None or min(told(found)) >= 0


@given(full, full)
def test_a_time_of_flushes_that_cannot_be_told_takes_nothing_else_away(old: IoCounts, change: IoCounts):
    later = replace(plus(old, change), flush_ms=0)
    found = difference(look(replace(old, flush_ms=10**9)), look(later))
    assert found is not None
    assert (found.flush_ms, found.flushes, found.reads) == (None, change.flushes, change.reads)


def test_a_time_of_discards_that_passed_its_range_is_made_whole():
    old = made(*range(1, 13))
    found = difference(
        look(replace(old, discard_ms=WRAP - 400)), look(replace(old, discards=90, discard_ms=600))
    )
    assert found is not None
    assert found.discard_ms == 1000


def test_requests_of_every_sort_come_to_an_end():
    assert completed(made(1, 20, 3, 4, 5, 6, 7)) == 21
    assert completed(made(1, 20, 3, 4, 5, 6, 7, 300, 8, 9, 4000, 10)) == 4321


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
    other = replace(START, reads=1, busy_ms=700, flushes=4)
    assert together((START, other)) == IoCounts(
        reads=101, writes=400, read_bytes=8192, write_bytes=16384, read_ms=2000, write_ms=4000, busy_ms=1500
    )
    assert together((other, other)).flushes == 8


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


def test_only_whole_disks_that_the_kernel_counts_are_counted(tree: Tree, monkeypatch: pytest.MonkeyPatch):
    disk = tree.sata(files={"stat": "1 0 2 3 4 0 5 6 8 7 9 10 11 12 13 14 15"})
    tree.partition(disk, "sda1", "8:1")
    tree.stacked("dm-0", "253:0", disk)
    tree.sata("sdb", "8:16", port=4, files={"queue/iostats": "0"})
    total = SimpleNamespace(
        read_count=1, write_count=2, read_bytes=3, write_bytes=4, read_time=5, write_time=6, busy_time=7
    )

    def told(*, perdisk: bool, nowrap: bool) -> dict[str, SimpleNamespace]:
        assert perdisk
        assert not nowrap
        return dict.fromkeys(("sda", "sda1", "dm-0", "sdb"), total)

    monkeypatch.setattr(psutil, "disk_io_counters", told)
    assert counts(tree.sys, tree.proc) == {
        "sda": Counted(
            counts=made(1, 2, 3, 4, 5, 6, 7, 10, 12 * 512, 13, 14, 15),
            instance="boot 11111111-2222-3333-4444-555555555555, disk 1",
            in_flight=8,
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


# Fields by position as Documentation/admin-guide/iostats.rst numbers them, the name being the third word before
# them; sectors are always 512 bytes.
BY_HAND = ((3, 1), (7, 1), (5, 512), (9, 512), (6, 1), (10, 1), (12, 1))
BY_HAND_SINCE_5_5 = (*BY_HAND, (14, 1), (16, 512), (17, 1), (18, 1), (19, 1))


def by_hand() -> dict[str, tuple[int, ...]]:
    lines = [line.split() for line in Path("/proc/diskstats").read_text(encoding="ascii").splitlines()]
    return {
        line[2]: tuple(int(line[at]) * unit for at, unit in (BY_HAND_SINCE_5_5 if len(line) >= 20 else BY_HAND))
        for line in lines
    }


def test_the_counts_of_this_computer_lie_between_two_looks_at_diskstats_under_load(tmp_path: Path):
    enough = threading.Event()
    looks = []

    def load() -> None:
        with (tmp_path / "load").open("wb", buffering=0) as file:
            while not enough.is_set():
                file.seek(0)
                file.write(os.urandom(65_536))
                os.fsync(file.fileno())  # so that the disk writes and flushes
                os.posix_fadvise(file.fileno(), 0, 0, os.POSIX_FADV_DONTNEED)
                (tmp_path / "load").read_bytes()

    loading = threading.Thread(target=load)
    loading.start()
    try:
        for _ in range(20):
            before, found, after = by_hand(), counts(), by_hand()
            if not found:
                pytest.skip("this computer shows no physical disk that its kernel counts")
            looks.append(found)
            for name, counted in found.items():
                for low, value, high in zip(before[name], told(counted.counts), after[name], strict=True):
                    assert low <= value <= high
                assert counted.in_flight is not None
                assert counted.in_flight >= 0
    finally:
        enough.set()
        loading.join()
    for name in looks[0].keys() & looks[-1].keys():
        assert difference(looks[0][name], looks[-1][name]) is not None
