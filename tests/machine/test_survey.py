from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.protocol import Address
from diskwatch.machine.survey import joined
from diskwatch.records import Kind
from tests.machine.trees import Tree


def test_a_drive_that_kernel_and_scan_both_list_is_one_drive(tree: Tree):
    tree.sata()
    tree.nvme()
    drives = physical_drives(tree.sys)
    entries = (Address(node="/dev/sda", type="scsi"), Address(node="/dev/nvme0", type="nvme"))
    assert joined(drives, entries) == drives
    assert joined(drives, (Address(node="/dev/nvme0n2", type="nvme"),)) == drives


def test_the_scan_tells_the_type_only_where_the_kernel_left_it_open(tree: Tree):
    tree.sata("sda")
    tree.usb("sdb")
    drives = physical_drives(tree.sys)
    entries = (Address(node="/dev/sda", type="usbjmicron"), Address(node="/dev/sdb", type="usbjmicron"))
    assert [drive.address.type for drive in joined(drives, entries)] == ["sat", "usbjmicron"]


def test_a_bare_scsi_from_the_scan_teaches_nothing(tree: Tree):
    tree.usb("sdb")
    drives = physical_drives(tree.sys)
    assert joined(drives, (Address(node="/dev/sdb", type="scsi"),)) == drives
    assert joined(drives, (Address(node="/dev/sdb"),)) == drives


def test_drives_behind_a_controller_are_drives_of_their_own(tree: Tree):
    tree.sas("sda", "8:0")
    entries = (
        Address(node="/dev/bus/0", type="megaraid,7"),
        Address(node="/dev/bus/0", type="sat+megaraid,8"),
        Address(node="/dev/sda", type="cciss,0"),
    )
    found = joined(physical_drives(tree.sys), entries)
    assert [drive.place.device for drive in found] == [
        "/dev/sda",
        "/dev/bus/0 megaraid,7",
        "/dev/bus/0 sat+megaraid,8",
        "/dev/sda cciss,0",
    ]
    assert [drive.address for drive in found[1:]] == list(entries)
    assert [drive.drive.identity.path for drive in found] == [drive.place.device for drive in found]


def test_a_lone_drive_behind_a_controller_is_still_named_by_path_and_type():
    (drive,) = joined((), (Address(node="/dev/bus/0", type="megaraid,7"),))
    assert drive.place.device == "/dev/bus/0 megaraid,7"
    assert drive.drive.identity.weak


def test_a_node_that_the_kernel_does_not_show_is_named_by_its_path_alone():
    found = joined((), (Address(node="/dev/sda", type="sat"), Address(node="/dev/nvme0", type="nvme")))
    assert [(drive.place.device, drive.address.type, drive.drive.kind) for drive in found] == [
        ("/dev/sda", "sat", Kind.HDD),
        ("/dev/nvme0", "nvme", Kind.NVME),
    ]


def test_several_types_on_one_unknown_node_are_told_apart_by_type():
    found = joined(
        (), (Address(node="/dev/x", type="usbjmicron,0"), Address(node="/dev/x", type="usbjmicron,1"))
    )
    assert [drive.place.device for drive in found] == ["/dev/x usbjmicron,0", "/dev/x usbjmicron,1"]


def test_a_repeated_scan_line_adds_nothing():
    assert len(joined((), (Address(node="/dev/sda", type="sat"),) * 2)) == 1


def test_a_device_that_was_passed_over_on_purpose_is_not_brought_back():
    assert joined((), (Address(node="/dev/sdc", type="scsi"),), {"sdc"}) == ()
