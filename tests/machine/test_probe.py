import os
import shutil
import subprocess
import threading
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import pytest

from diskwatch.machine import probe as room
from diskwatch.machine.probe import BITE, READ_BYTES, Brought, DiskProber, Wanted
from diskwatch.records import REQUEST_BYTES
from tests.machine.trees import Tree
from tests.samples import HDD
from tests.service.machines import found
from tests.trends.probes import seeded

WANTED = Wanted(day=20_000, reads=256, requests=100, disk_ms=2_000)
SECTORS = 2_000_000_000_000 // 512
DISK = replace(found(HDD), blocks=("sda",))


def quietly(_number):
    """Nothing else happens before a read; a test may have something happen, or say what the read takes."""


class Scripted:
    """A disk of the tree whose reads move its counters, and that others use when a test says so."""

    def __init__(self, tree, took=5_500, sliced=2_000):
        self.tree, self.took, self.sliced = tree, took, sliced
        self.spots, self.busy_us, self.sectors, self.writes, self.in_flight = [], 0, 1_000, 50, 0
        self.before = quietly
        self.opened = 0
        self.tell()

    def tell(self):
        words = [9, 0, self.sectors, 0, self.writes, 0, 0, 0, self.in_flight, 0, 0]
        self.tree.put(self.tree.sys / "block/sda/stat", " ".join(map(str, words)))

    def __call__(self, node, largest):
        assert node == self.tree.dev / "sda"
        assert largest == REQUEST_BYTES
        self.opened += 1
        return self

    def __enter__(self):
        return self

    def __exit__(self, *_):
        return None

    def read(self, place, size):
        told: int | None = self.before(len(self.spots))
        self.spots.append((place, size))
        took = told if told is not None else self.took if size == READ_BYTES else self.sliced
        self.busy_us += abs(took)
        if took >= 0:
            self.sectors += size // 512
        self.tell()
        return took if took >= 0 else None


@pytest.fixture
def tree(tmp_path):
    tree = Tree(tmp_path)
    tree.sata("sda", sectors=SECTORS)
    return tree


@pytest.fixture
def disk(tree, monkeypatch):
    disk = Scripted(tree)
    monkeypatch.setattr(room, "TimedReads", disk)
    monkeypatch.setattr(room, "QUIET", 0.0)
    return disk


@pytest.fixture
def prober(disk):
    tree = disk.tree
    return DiskProber(sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev, chance=seeded(1))


def test_it_reads_at_random_in_one_narrow_band_and_then_a_slice_in_one_go(prober, disk):
    brought = prober.probe(DISK, WANTED)
    assert brought.dropped is None
    assert brought.band_us == (5_500,) * 256
    assert brought.slice_us == (2_000,) * 100
    assert brought.disk_ms == -(-disk.busy_us // 1000) <= 2_000
    band = [place for place, size in disk.spots[:257] if size == READ_BYTES]
    assert all(0 <= place - brought.place < SECTORS * 512 // 1000 for place in band)
    assert len(set(band)) > 250
    assert all(place % READ_BYTES == 0 for place, _ in disk.spots)
    run = [place for place, size in disk.spots if size == REQUEST_BYTES]
    assert run == [run[0] + number * REQUEST_BYTES for number in range(100)]
    assert run[-1] + REQUEST_BYTES <= SECTORS * 512


def test_the_bands_of_a_month_leave_no_wide_gap(prober):
    places = sorted(
        prober.probe(DISK, replace(WANTED, day=day, reads=0, requests=0)).place for day in range(30)
    )
    gaps = [later - earlier for earlier, later in pairwise(places)]
    assert max(gaps) < SECTORS * 512 * 0.06


def test_a_slow_disk_is_kept_busy_no_longer_than_it_may(prober, disk):
    disk.took, disk.sliced = 30_000, 9_000
    brought = prober.probe(DISK, WANTED)
    assert brought.disk_ms <= 2_000
    assert 40 < len(brought.band_us) < 60, "the slice gets its share"
    assert len(brought.slice_us) > 20


def test_somebody_elses_request_ends_it_and_its_bite_is_not_kept(prober, disk):
    def others(number):
        if number == 70:
            disk.writes += 1

    disk.before = others
    brought = prober.probe(DISK, WANTED)
    assert brought.dropped == "somebody else came to use it."
    assert len(brought.band_us) == 2 * BITE
    assert brought.slice_us == ()
    assert brought.disk_ms >= 3 * BITE * 5, "what was read for nothing kept it busy too"


def test_somebody_elses_reads_and_what_is_still_under_way_count_as_well(prober, disk):
    def reads(number):
        disk.sectors += 8 if number == 5 else 0

    disk.before = reads
    assert prober.probe(DISK, WANTED).band_us == ()

    def waits(number):
        disk.in_flight = 1 if number >= 70 else 0

    disk.before = waits
    disk.spots.clear()
    brought = prober.probe(DISK, WANTED)
    assert (len(brought.band_us), brought.dropped) == (64, "somebody else came to use it.")


def test_where_the_computer_let_it_wait_the_times_are_not_kept(prober, disk, tree):
    def waits(number):
        tree.put(tree.proc / "thread-self/schedstat", f"1 {0 if number < 40 else 5_000_000} 1")

    disk.before = waits
    brought = prober.probe(DISK, WANTED)
    assert (len(brought.band_us), brought.dropped) == (BITE, "the computer had too much else to do.")


def test_a_disk_at_work_is_not_opened(prober, disk):
    disk.in_flight = 1
    disk.tell()
    assert prober.probe(DISK, WANTED) == Brought(dropped="it was at work.")
    assert disk.opened == 0


@pytest.mark.parametrize(
    ("path", "content", "why"),
    [
        ("queue/rotational", "0", "its platters do not turn, as the kernel has it."),
        ("queue/zoned", "host-managed", "some of its zones cannot be read before they are written."),
        ("device/power/runtime_status", "suspended", "it is suspended by the kernel."),
        ("size", "2000", "it is too small."),
        ("stat", "no counters", "it was at work."),
    ],
)
def test_what_must_not_be_read_is_not_opened(prober, disk, path, content, why):
    disk.tree.put(disk.tree.sys / "block/sda" / path, content)
    assert prober.probe(DISK, WANTED) == Brought(dropped=why)
    assert disk.opened == 0


def test_a_drive_of_several_block_devices_is_left_alone(prober, disk):
    assert prober.probe(replace(DISK, blocks=("sda", "sdb")), WANTED).dropped is not None
    assert disk.opened == 0


def test_a_read_that_fails_is_kept_and_the_last_one(prober, disk):
    disk.before = lambda number: -9_000_000 if number == 40 else None
    brought = prober.probe(DISK, WANTED)
    assert brought.dropped == "a read of it failed."
    assert brought.band_us == (5_500,) * 39 + (None,)
    assert len(disk.spots) == 41


def test_nothing_is_kept_of_a_disk_whose_platters_stood_still(prober, disk):
    disk.before = lambda number: 6_000_000 if number == 0 else None
    brought = prober.probe(DISK, WANTED)
    assert (brought.band_us, brought.dropped) == ((), "its platters seemed to stand still.")
    assert len(disk.spots) == 1


def test_the_end_of_the_watch_ends_it(prober, disk):
    disk.before = lambda number: prober.stop() if number == 50 else None
    brought = prober.probe(DISK, WANTED)
    assert (len(brought.band_us), brought.dropped) == (BITE, "the watch ends.")


def test_a_disk_that_hangs_is_not_waited_for_nor_probed_again(tree, disk, monkeypatch):
    monkeypatch.setattr(room, "LONGEST", 0.05)
    prober = DiskProber(sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)
    goes_on = threading.Event()

    def hangs(_number):
        goes_on.wait(10)

    disk.before = hangs
    try:
        for _ in range(2):
            brought = prober.probe(DISK, WANTED)
            assert (brought.disk_ms, brought.dropped) == (2_000, "its reads did not come back in time.")
        assert disk.opened == 1
    finally:
        goes_on.set()


def test_what_cannot_be_opened_is_told(tree, monkeypatch):
    monkeypatch.setattr(room, "QUIET", 0.0)
    tree.put(tree.sys / "block/sda/stat", "1 0 2 3 4 0 5 6 0 7 9")
    prober = DiskProber(sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)
    assert (
        prober.probe(DISK, WANTED).dropped == "it could not be opened for reading: No such file or directory."
    )


@pytest.fixture
def loop(tmp_path):
    """A real block device of 256 MiB, without contents."""
    if os.geteuid() != 0 or shutil.which("losetup") is None:
        pytest.skip("a loop device needs root and losetup")
    image = tmp_path / "image"
    image.write_bytes(b"")
    os.truncate(image, 256 * 1024 * 1024)
    made = subprocess.run(["losetup", "--find", "--show", image], capture_output=True, text=True, check=False)
    if made.returncode != 0:
        pytest.skip(f"no loop device: {made.stderr.strip()}")
    name = made.stdout.strip().removeprefix("/dev/")
    yield name
    subprocess.run(["losetup", "--detach", f"/dev/{name}"], check=True)


def test_a_real_block_device_is_read_past_the_cache_within_its_time(loop, monkeypatch):
    monkeypatch.setattr(room, "QUIET", 0.05)
    monkeypatch.setattr(DiskProber, "_let_wait", lambda *_: False)  # other tests may keep this machine busy
    before = (Path("/sys/block") / loop / "stat").read_text().split()
    brought = DiskProber(any_disk=True).probe(replace(DISK, blocks=(loop,)), WANTED)
    after = (Path("/sys/block") / loop / "stat").read_text().split()
    assert brought.dropped is None
    assert (len(brought.band_us), len(brought.slice_us)) == (256, 100)
    assert brought.disk_ms <= 2_000
    sectors = int(after[2]) - int(before[2])
    assert sectors == (258 * READ_BYTES + 100 * REQUEST_BYTES) // 512, "no byte came from memory"
    assert after[4] == before[4], "nothing was written"


def test_a_real_block_device_that_others_read_is_let_alone(loop, monkeypatch):
    monkeypatch.setattr(room, "QUIET", 0.2)
    stop = threading.Event()

    def reads():
        with (Path("/dev") / loop).open("rb", buffering=0) as file:
            while not stop.is_set():
                os.posix_fadvise(file.fileno(), 0, 0, os.POSIX_FADV_DONTNEED)
                os.pread(file.fileno(), 65_536, 0)
                stop.wait(0.01)

    other = threading.Thread(target=reads)
    other.start()
    try:
        brought = DiskProber(any_disk=True).probe(replace(DISK, blocks=(loop,)), WANTED)
    finally:
        stop.set()
        other.join()
    assert brought == Brought(dropped="it was at work.")
