from diskwatch.machine.stacks import stack_on
from tests.machine.trees import Tree


def test_a_stack_reaches_through_partition_lock_and_volume(tree: Tree):
    disk = tree.sata()
    part = tree.partition(disk, "sda2", "8:2")
    crypt = tree.stacked("dm-0", "253:0", part, dm_name="crypt")
    tree.stacked("dm-1", "253:1", crypt, dm_name="vg-home")
    tree.sata("sdb", "8:16", port=4)
    stack = stack_on(tree.sys, ["sda"])
    assert stack.names == {"sda", "sda2", "dm-0", "dm-1"}
    assert stack.numbers == {"8:0", "8:2", "253:0", "253:1"}


def test_a_partition_of_an_array_lies_on_both_of_its_disks(tree: Tree):
    first, second = tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4)
    array = tree.stacked("md0", "9:0", first, second)
    tree.partition(array, "md0p1", "259:7")
    for disk in ("sda", "sdb"):
        assert stack_on(tree.sys, [disk]).numbers >= {"9:0", "259:7"}


def test_holders_that_run_in_a_circle_or_are_gone_end_the_walk(tree: Tree):
    disk = tree.sata()
    upper = tree.stacked("dm-0", "253:0", disk)
    (upper / "holders" / "sda").symlink_to(disk)
    (upper / "holders" / "dm-9").symlink_to("gone")
    assert stack_on(tree.sys, ["sda"]).numbers == {"8:0", "253:0"}


def test_a_loop_over_a_partition_lies_on_its_drive_and_one_over_a_file_does_not(tree: Tree):
    tree.partition(tree.sata(), "sda2", "8:2")
    tree.loop("loop0", "7:0", "/dev/sda2")
    tree.loop("loop1", "7:1", "/home/user/image")
    tree.block("loop2", "devices/virtual/block", device=None, number="7:2")
    assert stack_on(tree.sys, ["sda"], dev_root=tree.dev).names == {"sda", "sda2", "loop0"}


def test_a_cached_disk_lies_on_the_disk_and_on_its_cache(tree: Tree):
    disk, cache = tree.sata("sda", "8:0"), tree.sata("sdb", "8:16", port=4)
    tree.stacked("bcache0", "252:0", disk, cache)
    assert "252:0" in stack_on(tree.sys, ["sda"]).numbers & stack_on(tree.sys, ["sdb"]).numbers


def test_names_given_to_partitions_are_kept(tree: Tree):
    disk = tree.sata()
    tree.partition(disk, "sda1", "8:1", label="EFI part=1")
    tree.partition(disk, "sda2", "8:2")
    assert stack_on(tree.sys, ["sda"]).labels == {"EFI part=1"}
