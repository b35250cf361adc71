from dataclasses import replace

import pytest

from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.here import found_of, lies_on, mount_of
from diskwatch.machine.mounts import parse
from diskwatch.records import Identity
from tests.machine.trees import Tree


def test_a_drive_is_known_again_by_its_name_wherever_it_is_plugged_in(tree: Tree):
    tree.sata("sda", "8:0")
    tree.sata("sdb", "8:16", port=4, serial="INV-A-0002", wwid="naa.5000f00000000002")
    first, second = physical_drives(tree.sys)
    moved = replace(second.place, device="/dev/sda", bay=None)
    assert found_of(second.drive, moved, physical_drives(tree.sys)) == second
    assert found_of(first.drive, first.place, [second]) is None


def test_an_invented_drive_is_not_taken_for_the_one_that_has_its_device(tree: Tree):
    tree.sata("sda", "8:0")
    (found,) = physical_drives(tree.sys)
    invented = Identity(wwn="naa.5fffff0000000001", model="INVENTED", serial="INVENTED-1", path="/dev/sda")
    other = replace(found.drive, identity=invented, capacity_bytes=4 * 10**12)
    assert found_of(other, found.place, [found]) is None
    assert found_of(replace(other, capacity_bytes=None), found.place, [found]) is None


def test_behind_an_adapter_device_bay_and_size_stand_for_the_name(tree: Tree):
    tree.usb(serial="BRIDGE-1")
    (found,) = physical_drives(tree.sys)
    said = Identity(wwn="naa.5fffff0000000001", model="INVENTED", serial="INVENTED-1", path="/dev/sdb")
    drive = replace(found.drive, identity=said)
    assert found_of(drive, found.place, [found]) == found
    assert found_of(replace(drive, capacity_bytes=1), found.place, [found]) is None
    assert found_of(drive, replace(found.place, bay=None), [found]) is None


def test_two_that_could_be_meant_are_none(tree: Tree):
    tree.sata("sda", "8:0")
    (found,) = physical_drives(tree.sys)
    assert found_of(found.drive, found.place, [found, found]) is None


def test_a_folder_lies_on_the_drive_that_carries_its_mount(tree: Tree, tmp_path):
    disk, other = (
        tree.sata("sda", "8:0"),
        tree.sata("sdb", "8:16", port=4, serial="B", wwid="naa.5000f00000000002"),
    )
    tree.mount("8:1", "/", "ext4", "/dev/sda1")
    tree.partition(disk, "sda1", "8:1")
    tree.partition(other, "sdb1", "8:17")
    tree.mount("8:17", str(tmp_path), "ext4", "/dev/sdb1")
    first, second = physical_drives(tree.sys)

    def on(folder, found):
        return lies_on(folder, found, sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)

    assert on(tmp_path / "not" / "there" / "yet", second)
    assert not on(tmp_path, first)
    assert on(tmp_path.parent, first)


def test_a_folder_in_memory_lies_on_no_drive(tree: Tree, tmp_path):
    tree.sata("sda", "8:0")
    tree.mount("0:30", str(tmp_path), "tmpfs", "tmpfs")
    (found,) = physical_drives(tree.sys)
    assert not lies_on(tmp_path, found, sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)
    (tree.proc / "1" / "mountinfo").write_text("")
    assert not lies_on(tmp_path, found, sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev)


@pytest.mark.parametrize(
    ("folder", "source"), [("/", "root"), ("/homes", "root"), ("/home", "late"), ("/home/me/x", "late")]
)
def test_the_longest_and_latest_mount_holds_a_folder(folder, source):
    lines = parse(
        "1 0 8:1 / / rw - ext4 root rw\n2 1 8:2 / /home rw - ext4 early rw\n3 1 8:3 / /home rw - ext4 late rw\n"
    )
    found = mount_of(folder, lines)
    assert found is not None
    assert found.source == source
