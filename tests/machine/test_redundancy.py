from pathlib import Path

import pytest

from diskwatch.machine.redundancy import arrays_on
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.zfs import pools
from diskwatch.records.array import Array
from tests.machine.trees import Tree


def md(tree: Tree, *below: Path, level="raid1", members="2", degraded="0", action="idle") -> None:
    place = tree.stacked("md0", "9:0", *below)
    for part in below:
        link = place / "slaves" / part.name
        link.parent.mkdir(exist_ok=True)
        link.symlink_to(part)
    files = {"level": level, "raid_disks": members, "degraded": degraded, "sync_action": action}
    for name, content in files.items():
        if content is not None:
            tree.put(place / "md" / name, content)


def of(tree: Tree, *blocks: str) -> tuple[Array, ...]:
    return arrays_on(stack_on(tree.sys, blocks), sys_root=tree.sys, pools=pools(tree.proc))


def elsewhere(tree: Tree, **array: str | None) -> bool | None:
    md(tree, tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4), **array)
    (found,) = of(tree, "sda")
    return found.elsewhere


def test_a_lone_drive_is_a_part_of_nothing(tree: Tree):
    tree.partition(tree.sata(), "sda1", "8:1")
    assert of(tree, "sda") == ()


def test_a_mirror_over_two_drives_is_told_of_both(tree: Tree):
    md(tree, tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4))
    mirror = Array(kind="md", name="md0", level="raid1", members=2, missing=0, rebuilding=False, elsewhere=True)
    assert of(tree, "sda") == of(tree, "sdb") == (mirror,)


@pytest.mark.parametrize(
    ("array", "outlives"),
    [
        (("raid1", "2", "1", "idle"), False),
        (("raid1", "3", "1", "idle"), True),
        (("raid1", "2", "1", "recover"), False),
        (("raid1", "2", "0", "resync"), None),
        (("raid5", "3", "0", "check"), True),
        (("raid5", "3", "1", "recover"), False),
        (("raid6", "4", "1", "recover"), True),
        (("raid6", "4", "2", "idle"), False),
        (("raid10", "4", "0", "idle"), True),
        (("raid10", "4", "1", "idle"), None),
        (("raid0", "2", None, None), False),
        (("linear", "2", None, None), False),
        (("raid1", "2", None, "idle"), None),
        (("faulty", "2", "0", "idle"), None),
        ((None, "2", "0", "idle"), None),
    ],
)
def test_whether_the_fellows_hold_the_same_follows_from_level_and_members(tree: Tree, array, outlives):
    level, members, degraded, action = array
    assert elsewhere(tree, level=level, members=members, degraded=degraded, action=action) is outlives


def test_a_mirror_with_both_halves_on_one_drive_is_no_mirror(tree: Tree):
    disk = tree.sata()
    md(tree, tree.partition(disk, "sda1", "8:1"), tree.partition(disk, "sda2", "8:2"))
    (found,) = of(tree, "sda")
    assert found.elsewhere is False


@pytest.mark.parametrize(
    ("data", "metadata", "outlives"),
    [("raid1", "raid1", True), ("single", "raid1", False), ("raid1", "dup", False), (None, None, None)],
)
def test_a_btrfs_over_two_drives_is_told_with_its_profile(tree: Tree, data, metadata, outlives):
    tree.btrfs("0000-INV", tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4))
    tree.put(tree.sys / "fs/btrfs/0000-INV/label", "pictures")
    for sort, profile in (("data", data), ("metadata", metadata)):
        if profile is not None:
            tree.put(tree.sys / "fs/btrfs/0000-INV/allocation" / sort / profile / "used_bytes", "1")
            tree.put(tree.sys / "fs/btrfs/0000-INV/allocation" / sort / "bytes_used", "1")
    (found,) = of(tree, "sdb")
    assert (found.kind, found.name, found.level, found.members) == ("btrfs", "pictures", data, 2)
    assert found.elsewhere is outlives


def test_a_btrfs_with_more_than_one_device_on_the_drive_leaves_it_open(tree: Tree):
    disk = tree.sata()
    one, two = tree.partition(disk, "sda1", "8:1"), tree.partition(disk, "sda2", "8:2")
    tree.btrfs("0000-INV", one, two)
    tree.put(tree.sys / "fs/btrfs/0000-INV/allocation/data/raid1/used_bytes", "1")
    (found,) = of(tree, "sda")
    assert found.elsewhere is None


def test_a_btrfs_on_one_device_shares_nothing(tree: Tree):
    tree.btrfs("0000-INV", tree.sata())
    assert of(tree, "sda") == ()


def test_a_volume_over_two_drives_may_be_a_mirror_or_the_opposite(tree: Tree):
    first, second = tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4)
    place = tree.stacked("dm-0", "253:0", first, second, dm_name="vg-data")
    tree.put(place / "dm/uuid", "LVM-INVENTED")
    (place / "slaves").mkdir()
    for part in (first, second):
        (place / "slaves" / part.name).symlink_to(part)
    assert of(tree, "sda") == (Array(kind="dm", name="vg-data", members=2),)


def test_a_volume_on_one_drive_alone_and_an_encrypted_one_share_nothing(tree: Tree):
    disk = tree.sata()
    for name, uuid in (("dm-0", "LVM-INVENTED"), ("dm-1", "CRYPT-LUKS2-INVENTED")):
        place = tree.stacked(name, f"253:{name[-1]}", disk, dm_name=name)
        tree.put(place / "dm/uuid", uuid)
        (place / "slaves").mkdir()
        (place / "slaves" / "sda").symlink_to(disk)
    assert of(tree, "sda") == ()


def test_how_a_pool_spreads_what_it_holds_is_not_known(tree: Tree):
    tree.partition(tree.sata(), "sda1", "8:1", label="zfs-00c0ffee00c0ffee")
    tree.zfs("tank")
    assert of(tree, "sda") == (Array(kind="zfs", name="tank"),)
