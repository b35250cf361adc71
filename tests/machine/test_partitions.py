import pytest

from diskwatch.machine.partitions import Piece, piece_at
from tests.machine.trees import Tree


@pytest.fixture
def parted(tree: Tree):
    disk = tree.sata()
    for name, number, start, size in (("sda1", "8:1", 2048, 100), ("sda2", "8:2", 4096, 200)):
        part = tree.partition(disk, name, number)
        tree.put(part / "start", str(start))
        tree.put(part / "size", str(size))
    return tree


@pytest.mark.parametrize(
    ("sector", "piece"),
    [
        (2047, None),
        (2048, Piece(name="sda1", sector=0)),
        (2147, Piece(name="sda1", sector=99)),
        (2148, None),
        (4100, Piece(name="sda2", sector=4)),
        (9999, None),
    ],
)
def test_a_sector_lies_in_the_partition_that_covers_it_or_in_none(parted: Tree, sector, piece):
    assert piece_at("sda", sector, sys_root=parted.sys) == piece


def test_of_a_disk_without_partitions_or_that_is_gone_nothing_is_known(tree: Tree):
    tree.virtio("vda")
    assert piece_at("vda", 5, sys_root=tree.sys) is None
    assert piece_at("sdz", 5, sys_root=tree.sys) is None
