from diskwatch.machine.stacks import stack_on
from diskwatch.machine.swaps import swap_on
from diskwatch.records import Mount
from tests.machine.trees import Tree

KIB = 1024


def swap(tree: Tree, *blocks: str) -> tuple[Mount, ...]:
    return swap_on(stack_on(tree.sys, blocks), tree.proc, sys_root=tree.sys, dev_root=tree.dev)


def test_swap_partitions_and_volumes_of_a_drive_are_told_as_one_with_what_is_in_use(tree: Tree):
    disk = tree.sata()
    tree.partition(disk, "sda2", "8:2")
    tree.stacked("dm-1", "253:1", disk, dm_name="vg-swap")
    tree.sata("sdb", "8:16", port=4)
    tree.swaps(
        "/dev/sda2                               partition\t1000\t\t10\t\t-2",
        "/dev/mapper/vg-swap                     partition\t2000\t\t0\t\t-3",
        "/dev/sdb                                partition\t4000\t\t5\t\t100",
    )
    assert swap(tree, "sda") == (Mount(point="swap", used_bytes=10 * KIB, total_bytes=3000 * KIB),)
    assert swap(tree, "sdb") == (Mount(point="swap", used_bytes=5 * KIB, total_bytes=4000 * KIB),)


def test_a_swap_file_is_counted_in_its_file_system_and_swap_in_memory_on_no_drive(tree: Tree):
    tree.sata()
    tree.block("zram0", "devices/virtual/block", device=None, number="252:0")
    tree.swaps("/sda file\t1000\t10\t-2", "/dev/sda file\t1000\t10\t-2", "/dev/zram0 partition\t1000\t10\t-2")
    assert swap(tree, "sda") == ()


def test_a_kernel_without_swap_has_none(tree: Tree):
    tree.sata()
    assert swap(tree, "sda") == ()
    tree.swaps()
    assert swap(tree, "sda") == ()
