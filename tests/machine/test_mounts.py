import errno
import os
from pathlib import Path

import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.mounts import living_on, measured, mount_lines, parse
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.zfs import pools
from diskwatch.records import Mount
from tests.machine.trees import Tree


def points(tree: Tree, *blocks: str) -> list[str]:
    mounts = living_on(stack_on(tree.sys, blocks), mount_lines(tree.proc), sys_root=tree.sys, dev_root=tree.dev)
    return [mount.point for mount in mounts]


def sized(tree: Tree, *blocks: str) -> tuple[list[Mount], list[str]]:
    asked: list[str] = []

    def measure(point: str, number: str) -> tuple[int, int]:
        asked.append(f"{point} {number}")
        return 30, 100

    mounts = living_on(
        stack_on(tree.sys, blocks),
        mount_lines(tree.proc),
        sys_root=tree.sys,
        dev_root=tree.dev,
        measure=measure,
    )
    return list(mounts), asked


def test_partitions_and_volumes_of_a_drive_live_there_and_others_do_not(tree: Tree):
    disk = tree.sata()
    tree.partition(disk, "sda1", "8:1")
    crypt = tree.stacked("dm-0", "253:0", tree.partition(disk, "sda2", "8:2"))
    tree.stacked("dm-1", "253:1", crypt)
    tree.mount("253:1", "/home", "ext4", "/dev/mapper/vg-home")
    tree.mount("8:1", "/boot", "vfat", "/dev/sda1")
    tree.mount("8:17", "/other", "ext4", "/dev/sdb1")
    tree.mount("0:22", "/proc", "proc", "proc")
    tree.mount("0:40", "/net", "nfs4", "host:/sda1")
    assert points(tree, "sda") == ["/boot", "/home"]


def test_a_mirror_lives_on_both_of_its_disks(tree: Tree):
    tree.stacked("md0", "9:0", tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4))
    tree.mount("9:0", "/srv", "xfs", "/dev/md0")
    assert points(tree, "sda") == points(tree, "sdb") == ["/srv"]


def test_a_btrfs_is_found_by_its_source_on_every_device_of_it(tree: Tree):
    first = tree.partition(tree.sata("sda", "8:0"), "sda3", "8:3")
    second = tree.partition(tree.sata("sdb", "8:16", port=4), "sdb3", "8:19")
    tree.partition(tree.sata("sdc", "8:32", port=5), "sdc3", "8:35")
    tree.btrfs("f0f0-invented", first, second)
    tree.mount("0:30", "/", "btrfs", "/dev/sda3", root="/@")
    tree.mount("0:30", "/home", "btrfs", "/dev/sda3", root="/@home")
    assert points(tree, "sda") == points(tree, "sdb") == ["/", "/home"]
    assert points(tree, "sdc") == []


def test_a_btrfs_on_a_lock_is_found_by_the_locks_name(tree: Tree):
    tree.stacked("dm-3", "253:3", tree.sata(), dm_name="vault")
    tree.mount("0:30", "/", "btrfs", "/dev/mapper/vault")
    assert points(tree, "sda") == ["/"]


def test_a_source_that_is_a_link_is_followed(tree: Tree):
    tree.stacked("dm-3", "253:3", tree.sata())
    (tree.dev / "vg").mkdir()
    (tree.dev / "vg" / "data").symlink_to("../dm-3")
    tree.mount("0:30", "/data", "btrfs", "/dev/vg/data")
    assert points(tree, "sda") == ["/data"]


def lived_in_pool(tree: Tree, measure: object) -> list[Mount]:
    tree.partition(tree.sata(), "sda1", "8:1", label="zfs-0123456789abcdef")
    for source, point in (("tank/home", "/tank/home"), ("tank", "/tank"), ("tankard", "/other")):
        tree.mount(f"0:{40 + len(point)}", point, "zfs", source)
    tree.mount("0:60", "/tank/x", "zfs", "tank/x")
    return list(
        living_on(
            stack_on(tree.sys, ["sda"]),
            mount_lines(tree.proc),
            measure=measure,  # type: ignore[arg-type]  # every one below fits
            pools=pools(tree.proc),
        )
    )


def test_file_systems_of_a_pool_have_each_what_they_use_and_their_common_room_once(tree: Tree):
    tree.zfs("tank")
    assert lived_in_pool(tree, lambda *_: (30, 100)) == [
        Mount(point="/tank", used_bytes=30, total_bytes=100),
        Mount(point="/tank/x", used_bytes=30),
        Mount(point="/tank/home", used_bytes=30),
    ]


def test_a_pool_that_is_suspended_is_not_asked_for_its_size(tree: Tree):
    tree.zfs("tank", "SUSPENDED")

    def refuse(*_: str) -> None:
        raise AssertionError

    assert [mount.point for mount in lived_in_pool(tree, refuse)] == ["/tank", "/tank/x", "/tank/home"]


def test_nothing_is_said_of_a_pool_that_the_kernel_does_not_place(tree: Tree):
    tree.zfs("tank")
    tree.zfs("vault")
    assert lived_in_pool(tree, None) == []


def test_files_mounted_twice_are_shown_once_at_the_widest_then_shortest(tree: Tree):
    tree.sata()
    tree.mount("8:0", "/var/lib/inner", "ext4", "/dev/sda", root="/inner")
    tree.mount("8:0", "/b", "ext4", "/dev/sda", root="/x")
    tree.mount("8:0", "/data/long", "ext4", "/dev/sda")
    tree.mount("8:0", "/data", "ext4", "/dev/sda")
    assert points(tree, "sda") == ["/data"]


def test_folders_with_like_names_are_not_taken_for_each_other(tree: Tree):
    tree.sata()
    tree.mount("8:0", "/a", "btrfs", "/dev/sda", root="/@")
    tree.mount("8:0", "/b", "btrfs", "/dev/sda", root="/@home")
    assert points(tree, "sda") == ["/a", "/b"]


def test_a_mount_under_a_later_one_on_the_same_point_is_not_there(tree: Tree):
    tree.sata("sda", "8:0")
    tree.sata("sdb", "8:16", port=4)
    tree.mount("8:0", "/mnt", "ext4", "/dev/sda")
    tree.mount("8:16", "/mnt", "ext4", "/dev/sdb")
    assert points(tree, "sda") == []
    assert points(tree, "sdb") == ["/mnt"]


def test_the_size_of_a_file_system_stands_once_however_many_parts_are_mounted(tree: Tree):
    tree.sata()
    tree.mount("0:30", "/home", "btrfs", "/dev/sda", root="/@home")
    tree.mount("0:30", "/", "btrfs", "/dev/sda", root="/@")
    mounts, asked = sized(tree, "sda")
    assert mounts == [Mount(point="/", used_bytes=30, total_bytes=100), Mount(point="/home")]
    assert asked == ["/ 0:30"]


@pytest.mark.parametrize("type_", ["fuseblk", "gfs2"])
def test_a_file_system_that_may_hang_is_listed_but_not_asked_for_its_size(tree: Tree, type_: str):
    tree.sata()
    tree.mount("8:0", "/media/stick", type_, "/dev/sda")
    assert sized(tree, "sda") == ([Mount(point="/media/stick")], [])


def test_escapes_of_mountinfo_are_undone(tree: Tree):
    tree.sata()
    tree.mount("8:0", r"/my\040disk\011a\134b\012c", "ext4", "/dev/sda")
    assert points(tree, "sda") == ["/my disk\ta\\b\nc"]


def test_a_path_that_is_no_text_is_spelt_out(tree: Tree):
    tree.sata()
    (tree.proc / "1" / "mountinfo").write_bytes(b"20 1 8:0 / /d\xff rw - ext4 /dev/sda rw\n")
    mounts, asked = sized(tree, "sda")
    assert [mount.point for mount in mounts] == ["/d\\xff"]
    assert asked == ["/d\udcff 8:0"]


def test_the_own_view_stands_in_where_the_first_process_shows_nothing(tree: Tree):
    tree.sata()
    (tree.proc / "self" / "mountinfo").write_text("20 1 8:0 / /mine rw - ext4 /dev/sda rw\n")
    assert points(tree, "sda") == ["/mine"]


def test_no_mountinfo_at_all_means_nothing_known(tree: Tree):
    assert mount_lines(tree.proc) == ()


@given(st.text(alphabet=" -:/0189abc\\\n\t", max_size=80))
def test_no_text_upsets_the_reading_of_mountinfo(text: str):
    assert all(":" in line.number for line in parse(text))


def test_sizes_are_those_that_the_kernel_tells(tmp_path: Path):
    device = tmp_path.stat().st_dev
    found = measured(str(tmp_path), f"{os.major(device)}:{os.minor(device)}")
    told = os.statvfs(tmp_path)
    if told.f_blocks == 0:
        pytest.skip("the file system of this test has no size")
    assert found is not None
    assert found[1] == told.f_blocks * told.f_frsize
    assert 0 <= found[0] <= found[1]


def test_another_file_system_at_the_point_is_not_measured(tmp_path: Path):
    assert measured(str(tmp_path), "8:250") is None
    assert measured(str(tmp_path / "none"), "0:30") is None
    assert measured("/proc", "0:1") is None


def test_a_mount_that_lingers_after_its_disk_was_unplugged_lives_on_no_drive(
    tree: Tree, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    """The kernel keeps the number of a disk that is gone as long as something is mounted from it."""
    tree.partition(tree.sata("sdb", "8:16", port=4), "sdb1", "8:17")
    tree.mount("8:1", str(tmp_path), "ext4", "/dev/sda1")
    tree.mount("8:17", "/mnt/new", "ext4", "/dev/sdb1")
    assert points(tree, "sdb") == ["/mnt/new"]
    assert points(tree, "sda") == []

    def gone(point: str) -> os.statvfs_result:
        raise OSError(errno.EIO, "Input/output error", point)

    device = tmp_path.stat().st_dev
    monkeypatch.setattr(os, "statvfs", gone)
    assert measured(str(tmp_path), f"{os.major(device)}:{os.minor(device)}") is None


@pytest.mark.parametrize(
    ("mount", "file_system"), [("rw", "ro"), ("rw", "rw,emergency_ro"), ("ro", "ro"), ("rw,noatime", "rw")]
)
def test_a_file_system_lives_on_its_drive_whatever_the_kernel_says_of_writing(
    tree: Tree, mount: str, file_system: str
):
    """After a forced remount the mount may still say rw, and only the file system's own options ro."""
    tree.partition(tree.sata(), "sda1", "8:1")
    line = f"31 1 8:1 / /data {mount} shared:1 - ext4 /dev/sda1 {file_system},errors=remount-ro\n"
    (tree.proc / "1/mountinfo").write_text(line)
    assert points(tree, "sda") == ["/data"]


def test_what_this_computer_mounts_from_its_disks_is_found():
    root = next((line for line in mount_lines() if line.point == "/"), None)
    owners = [
        drive.blocks
        for drive in physical_drives()
        if root is not None and root.number in stack_on(Path("/sys"), drive.blocks).numbers
    ]
    if not owners:
        pytest.skip("the root file system is on no physical disk here")
    for blocks in owners:
        assert "/" in [mount.point for mount in living_on(stack_on(Path("/sys"), blocks), mount_lines())]
