import pytest

from diskwatch.machine.file_blocks import FileBlock, file_block, sector_of
from tests.machine.trees import Tree


@pytest.fixture
def mounted(tree: Tree):
    """A disk with an ext4 file system, one of another sort, and one behind encryption."""
    disk = tree.sata()
    for name, number, start in (("sda1", "8:1", 2_048), ("sda2", "8:2", 4_096), ("sda3", "8:3", 8_192)):
        part = tree.partition(disk, name, number)
        tree.put(part / "start", str(start))
        tree.put(part / "size", "2048")
    tree.mount("8:1", "/srv/data", "ext4", "/dev/sda1")
    tree.mount("8:1", "/srv", "ext4", "/dev/sda1", root="/shared")
    tree.mount("8:2", "/other", "xfs", "/dev/sda2")
    tree.mount("254:0", "/secret", "ext4", "/dev/mapper/secret")
    return tree


def at(tree, sector, size=4_096):
    return file_block("sda", sector, sys_root=tree.sys, proc_root=tree.proc, size_of=lambda _: size)


def test_a_sector_is_a_block_of_the_file_system_that_its_partition_holds(mounted):
    assert at(mounted, 2_048 + 17) == FileBlock(node="/dev/sda1", point="/srv", block=2, size=4_096)
    place = at(mounted, 2_048 + 17, size=1_024)
    assert place is not None
    assert place.block == 8


def test_a_file_system_on_the_whole_disk_counts_from_its_start(tree):
    tree.sata()
    tree.mount("8:0", "/srv", "ext4", "/dev/sda")
    assert at(tree, 800) == FileBlock(node="/dev/sda", point="/srv", block=100, size=4_096)


@pytest.mark.parametrize("sector", [10, 4_100, 8_200, 99_999])
def test_where_no_ext4_lies_directly_there_is_none(mounted, sector):
    assert at(mounted, sector) is None


def test_a_mount_that_does_not_tell_its_block_size_is_none(tree):
    tree.sata()
    tree.mount("8:0", "/no/such/folder/here", "ext4", "/dev/sda")
    assert at(tree, 2_060, size=0) is None
    assert file_block("sda", 2_060, sys_root=tree.sys, proc_root=tree.proc) is None


def test_a_self_tests_blocks_are_as_large_as_the_disks_own(tree):
    disk = tree.sata()
    assert sector_of("sda", 100, sys_root=tree.sys) == 100
    tree.put(disk / "queue/logical_block_size", "4096")
    assert sector_of("sda", 100, sys_root=tree.sys) == 800
