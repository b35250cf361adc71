from diskwatch.machine.nodes import kernel_name
from tests.machine.trees import Tree


def test_a_volume_is_found_by_the_name_that_it_was_given(tree: Tree):
    tree.stacked("dm-3", "253:3", tree.sata(), dm_name="vault")
    assert kernel_name("/dev/mapper/vault", tree.sys, tree.dev) == "dm-3"


def test_a_link_is_followed_and_a_plain_node_is_its_own_name(tree: Tree):
    (tree.dev / "disk").mkdir()
    (tree.dev / "disk" / "mine").symlink_to("../sda2")
    assert kernel_name("/dev/disk/mine", tree.sys, tree.dev) == "sda2"
    assert kernel_name("/dev/sda2", tree.sys, tree.dev) == "sda2"
    assert kernel_name("/dev/mapper/none", tree.sys, tree.dev) == "none"
