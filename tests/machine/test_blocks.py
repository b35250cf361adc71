from pathlib import Path

import pytest

from diskwatch.machine.blocks import node_of, physical_drives
from diskwatch.machine.protocol import Address
from diskwatch.records import Identity, Kind
from tests.machine.trees import Tree


def test_each_sort_of_drive_is_listed_once_with_its_way_of_asking(tree: Tree):
    tree.sata("sda")
    tree.usb("sdb")
    tree.sas("sdc")
    tree.virtio("vda")
    tree.nvme("nvme0")
    tree.block("loop0", "devices/virtual/block", device=None, number="7:0")
    drives = physical_drives(tree.sys)
    assert [(drive.address.node, drive.address.type, drive.drive.kind) for drive in drives] == [
        ("/dev/sda", "sat", Kind.HDD),
        ("/dev/sdb", None, Kind.USB),
        ("/dev/sdc", "scsi", Kind.SAS),
        ("/dev/vda", None, Kind.VIRTUAL),
        ("/dev/nvme0", "nvme", Kind.NVME),
    ]
    assert [drive.expects_smart for drive in drives] == [True, True, True, False, True]


def test_a_usb_adapter_is_named_by_its_ids_revision_and_serial(tree: Tree):
    tree.usb("sdb")
    device = tree.sys / "devices/pci0000:00/0000:00:14.0/usb1/1-4"
    assert physical_drives(tree.sys)[0].adapter is None
    for name, value in {"idVendor": "152d", "idProduct": "0578", "bcdDevice": "1402"}.items():
        tree.put(device / name, value)
    assert physical_drives(tree.sys)[0].adapter == "152d:0578:1402 INV-BRIDGE-7"
    (device / "serial").unlink()
    assert physical_drives(tree.sys)[0].adapter == "152d:0578:1402"


def test_namespaces_of_one_controller_are_one_drive(tree: Tree):
    tree.nvme("nvme0", namespaces=2)
    (drive,) = physical_drives(tree.sys)
    assert drive.blocks == ("nvme0n1", "nvme0n2")
    assert drive.address == Address(node="/dev/nvme0", type="nvme")
    assert drive.place.device == "/dev/nvme0"
    assert drive.drive.capacity_bytes == (2000 + 4000) * 512
    assert drive.drive.identity == Identity(
        wwn="eui.00f00000000001a1", model="INVENTED FLASH 2000", serial="INV-N-nvme0", path="/dev/nvme0"
    )


def test_a_namespace_of_unknown_size_leaves_the_size_unknown(tree: Tree):
    (tree.nvme("nvme0", namespaces=2)[1] / "size").unlink()
    (drive,) = physical_drives(tree.sys)
    assert drive.drive.capacity_bytes is None


def test_a_namespace_that_controllers_share_hangs_on_the_first_of_them(tree: Tree):
    system = "devices/virtual/nvme-subsystem/nvme-subsys0"
    tree.nvme("nvme0", namespaces=0)
    tree.nvme("nvme1", namespaces=0, pci="0000:02:00.0")
    tree.block("nvme0n1", system, device=system, number="259:0", files={"device/model": "INVENTED FLASH 2000"})
    for name, pci in (("nvme0", "0000:01:00.0"), ("nvme1", "0000:02:00.0")):
        controller = tree.sys / f"devices/pci0000:00/0000:00:1d.0/{pci}/nvme/{name}"
        (tree.sys / system / name).symlink_to(controller)
        (tree.sys / "class/nvme").mkdir(parents=True, exist_ok=True)
        (tree.sys / "class/nvme" / name).symlink_to(controller)
    (drive,) = physical_drives(tree.sys)
    assert drive.address.node == "/dev/nvme0"
    assert drive.drive.identity.model == "INVENTED FLASH 2000"
    assert drive.place.bay == "pci-0000:01:00.0 nvme"


def test_two_paths_to_one_sas_drive_are_one_drive(tree: Tree):
    tree.sas("sda", "8:0", host=0)
    tree.sas("sdb", "8:16", host=1)
    (drive,) = physical_drives(tree.sys)
    assert drive.blocks == ("sda", "sdb")
    assert drive.drive.capacity_bytes == 1000 * 512


def test_two_sas_drives_that_share_a_name_stay_two(tree: Tree):
    tree.sas("sda", "8:0", host=0, serial="INV-S-1")
    tree.sas("sdb", "8:16", host=1, serial="INV-S-2")
    assert len(physical_drives(tree.sys)) == 2


def test_a_virtual_disk_that_speaks_ata_may_be_asked_and_one_over_scsi_not(tree: Tree):
    tree.sata("sda", files={"device/model": "QEMU HARDDISK"})
    tree.sata("sdb", "8:16", port=4, files={"device/vendor": "QEMU", "device/model": "QEMU HARDDISK"})
    assert [(drive.drive.kind, drive.expects_smart) for drive in physical_drives(tree.sys)] == [
        (Kind.VIRTUAL, True),
        (Kind.VIRTUAL, False),
    ]


def test_a_suspended_drive_is_found_asleep(tree: Tree):
    tree.sata(files={"device/power/runtime_status": "suspended"})
    (drive,) = physical_drives(tree.sys)
    assert drive.asleep


def test_drives_keep_an_order_that_counts_letters_as_the_kernel_does(tree: Tree):
    for number, name in enumerate(("sdaa", "sdb", "sda")):
        tree.sata(name, f"8:{16 * number}", port=number + 1, serial=f"INV-{number}", wwid=None)
    assert [drive.blocks[0] for drive in physical_drives(tree.sys)] == ["sda", "sdb", "sdaa"]


def test_a_machine_without_sysfs_lists_nothing(tmp_path: Path):
    assert physical_drives(tmp_path) == ()


def test_a_slash_in_a_node_is_written_otherwise_in_sysfs():
    assert node_of("cciss!c0d0") == "/dev/cciss/c0d0"


def test_the_virtual_disk_of_this_computer_is_listed_where_it_has_one():
    if not Path("/sys/block/vda").exists():
        pytest.skip("this computer has no virtio disk")
    drive = next(drive for drive in physical_drives() if drive.blocks == ("vda",))
    assert drive.drive.kind is Kind.VIRTUAL
    assert not drive.expects_smart
    assert drive.place.bay is not None
    assert drive.place.bay.startswith("virtio")
    assert drive.drive.capacity_bytes == int(Path("/sys/block/vda/size").read_text(encoding="ascii")) * 512
