from diskwatch.machine.kept_errors import kept_errors
from diskwatch.machine.stacks import stack_on
from tests.machine.trees import Tree


def counts(tree: Tree, block="sda", **more):
    values = kept_errors(stack_on(tree.sys, [block], dev_root=tree.dev), sys_root=tree.sys, **more)
    return {value.signal: value.value for value in values}


def test_a_drive_on_which_nothing_counts_has_no_such_signal(tree: Tree):
    tree.sata()
    assert counts(tree) == {}


def test_errors_of_ext4_are_counted_on_the_drive_below(tree: Tree):
    disk = tree.sata()
    part = tree.partition(disk, "sda1", "8:1")
    tree.stacked("dm-0", "253:0", part)
    other = tree.sata("sdb", "8:16", port=4)
    tree.partition(other, "sdb1", "8:17")
    tree.put(tree.sys / "fs/ext4/sda1/errors_count", "2")
    tree.put(tree.sys / "fs/ext4/dm-0/errors_count", "3")
    tree.put(tree.sys / "fs/ext4/sdb1/errors_count", "0")
    (tree.sys / "fs/ext4/features").mkdir()
    assert counts(tree) == {"ext4-errors": 5}
    assert counts(tree, "sdb") == {"ext4-errors": 0}


def btrfs(tree: Tree, uuid, devices, stats, missing=()):
    folder = tree.sys / "fs/btrfs" / uuid
    for device in devices:
        (folder / "devices" / device).mkdir(parents=True)
    for number, text in enumerate(stats, start=1):
        tree.put(folder / f"devinfo/{number}/error_stats", text)
        tree.put(folder / f"devinfo/{number}/missing", "1" if number in missing else "0")


STATS = "write_errs 1\nread_errs 2\nflush_errs 0\ncorruption_errs 4\ngeneration_errs 0"


def test_errors_of_btrfs_are_counted_where_it_lies_on_one_device(tree: Tree):
    tree.sata()
    btrfs(tree, "one", ["sda"], [STATS])
    assert counts(tree) == {"btrfs-errors": 7}


def test_which_device_of_several_btrfs_means_is_not_guessed(tree: Tree):
    tree.sata()
    btrfs(tree, "two", ["sda", "sdb"], [STATS, STATS], missing=(2,))
    assert counts(tree) == {"degraded-arrays": 1}


def test_counts_that_btrfs_cannot_tell_are_not_known(tree: Tree):
    tree.sata()
    btrfs(tree, "one", ["sda"], ["invalid"])
    assert counts(tree) == {}


def test_an_array_tells_what_it_lacks_and_what_it_mended(tree: Tree):
    one, other = tree.sata(), tree.sata("sdb", "8:16", port=4)
    md = tree.stacked("md0", "9:0", one, other)
    tree.put(md / "md/degraded", "1")
    tree.put(md / "md/mismatch_cnt", "128")
    tree.put(md / "md/dev-sda/errors", "6")
    tree.put(md / "md/dev-sdb/errors", "0")
    assert counts(tree) == {"degraded-arrays": 1, "array-mismatches": 128, "array-read-errors": 6}
    assert counts(tree, "sdb")["array-read-errors"] == 0


def test_an_array_that_has_nothing_to_lack_says_nothing_of_it(tree: Tree):
    md = tree.stacked("md0", "9:0", tree.sata())
    tree.put(md / "md/level", "raid0")
    assert counts(tree) == {}


def test_a_pool_that_is_not_whole_counts_as_one_that_lacks_a_member(tree: Tree):
    disk = tree.sata()
    tree.partition(disk, "sda1", "8:1", label="zfs-00c0ffee00c0ffee")
    assert counts(tree, pools={"tank": "ONLINE"}) == {"degraded-arrays": 0}
    assert counts(tree, pools={"tank": "DEGRADED"}) == {"degraded-arrays": 1}
    assert counts(tree, pools={"tank": "SUSPENDED"}) == {"degraded-arrays": 1}
    assert counts(tree, pools={"tank": "DEGRADED", "other": "ONLINE"}) == {}
