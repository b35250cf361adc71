import pytest

from diskwatch.machine.disks import asleep, look
from diskwatch.records import Kind
from tests.machine.trees import Tree, identify_words

WORDS = identify_words(
    model="INVENTED DISK 4000 LONGER NAME",
    serial="INV-A-0001",
    firmware="FW01AB12",
    wwn="5000f00000000001",
    turns=5400,
)


def test_a_sata_drive_is_known_by_its_own_words_where_the_kernel_keeps_them(tree: Tree):
    tree.sata(identify=WORDS, wwid=None, sectors=7_814_037_168)
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert (disk.model, disk.serial, disk.wwn) == (
        "INVENTED DISK 4000 LONGER NAME",
        "INV-A-0001",
        "naa.5000f00000000001",
    )
    assert (disk.firmware, disk.rotation_rpm, disk.kind) == ("FW01AB12", 5400, Kind.HDD)
    assert disk.capacity_bytes == 4_000_787_030_016


def test_a_drives_own_words_outweigh_what_the_kernel_assumes(tree: Tree):
    tree.sata(identify=[*WORDS[:217], "0001", *WORDS[218:]], serial=None, rotational=True)
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert (disk.kind, disk.serial) == (Kind.SSD, "INV-A-0001")


def test_words_that_leave_something_open_are_filled_from_the_scsi_face(tree: Tree):
    tree.sata(identify=[*WORDS[:10], *["2020"] * 10, *WORDS[20:217], "0000", *WORDS[218:]], rotational=False)
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert (disk.kind, disk.serial) == (Kind.SSD, "INV-A-0001")


@pytest.mark.parametrize(
    "files", [{"removable": "1"}, {"size": "0"}], ids=["stick", "drive that lost its size"]
)
def test_neither_removable_nor_without_size_alone_hides_a_drive(tree: Tree, files: dict[str, str]):
    tree.sata(files=files)
    assert look(tree.sys, "sda") is not None


def test_a_sata_drive_without_them_has_its_scsi_face_but_no_half_firmware(tree: Tree):
    tree.sata(rotational=False)
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert (disk.model, disk.serial, disk.wwn) == ("INVENTED DISK 40", "INV-A-0001", "naa.5000f00000000001")
    assert (disk.firmware, disk.kind) == (None, Kind.SSD)


def test_a_usb_drive_has_the_serial_of_its_bridge_only_for_want_of_its_own(tree: Tree):
    tree.usb("sdb")
    tree.usb("sdc", "8:32", port="1-5", serial="INV-OWN-1")
    first, second = look(tree.sys, "sdb"), look(tree.sys, "sdc")
    assert first is not None
    assert second is not None
    assert (first.model, first.serial, first.kind) == ("InvMaker Stick", "INV-BRIDGE-7", Kind.USB)
    assert second.serial == "INV-OWN-1"


def test_the_descriptive_form_of_wwid_is_no_world_wide_name(tree: Tree):
    tree.usb(wwid="t10.InvMaker Stick 0000")
    disk = look(tree.sys, "sdb")
    assert disk is not None
    assert disk.wwn is None


def test_an_nvme_namespace_is_known_by_its_controller(tree: Tree):
    tree.nvme()
    disk = look(tree.sys, "nvme0n2")
    assert disk is not None
    assert (disk.controller, disk.model, disk.serial) == ("nvme0", "INVENTED FLASH 2000", "INV-N-nvme0")
    assert (disk.firmware, disk.wwn, disk.kind) == ("FW1.0", "eui.00f00000000002a1", Kind.NVME)


@pytest.mark.parametrize("model", ["QEMU HARDDISK", "VBOX HARDDISK", "VMware Virtual S", "Virtual Disk"])
def test_a_disk_that_a_hypervisor_invents_is_virtual(tree: Tree, model: str):
    tree.sata(files={"device/model": model})
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert disk.kind is Kind.VIRTUAL


def test_a_sas_drive_is_named_by_maker_and_model(tree: Tree):
    tree.sas()
    disk = look(tree.sys, "sdc")
    assert disk is not None
    assert (disk.kind, disk.model, disk.serial, disk.firmware) == (
        Kind.SAS,
        "INVENTED SAS 900",
        "INV-S-0001",
        "AB12",
    )


@pytest.mark.parametrize(
    "name", ["loop0", "zram0", "ram0", "dm-0", "md127", "nbd0", "sr0", "fd0", "zd0", "bcache0", "unheard0"]
)
def test_what_is_made_of_others_or_of_memory_is_no_disk(tree: Tree, name: str):
    tree.block(name, "devices/virtual/block", device="devices/odd", number="7:0")
    assert look(tree.sys, name) is None


@pytest.mark.parametrize(
    "files",
    [{"device/type": "5"}, {"hidden": "1"}, {"removable": "1", "size": "0"}],
    ids=["cdrom", "hidden path", "empty reader"],
)
def test_a_device_that_holds_no_data_of_its_own_is_passed_over(tree: Tree, files: dict[str, str]):
    tree.sata(files=files)
    assert look(tree.sys, "sda") is None


def test_a_memory_card_is_one_disk_without_its_boot_corners(tree: Tree):
    card = "devices/platform/emmc/mmc_host/mmc0/mmc0:0001"
    tree.block(
        "mmcblk0",
        f"{card}/block",
        device=card,
        number="179:0",
        files={"device/type": "MMC", "device/name": "INVCARD", "device/serial": "0x1234abcd"},
    )
    tree.block("mmcblk0boot0", f"{card}/block", device=card, number="179:8")
    disk = look(tree.sys, "mmcblk0")
    assert disk is not None
    assert (disk.bus, disk.model, disk.serial, disk.kind) == ("mmc", "INVCARD", "0x1234abcd", Kind.SSD)
    assert look(tree.sys, "mmcblk0boot0") is None


def test_only_the_kernels_own_word_suspended_counts_as_asleep(tree: Tree):
    tree.sata(files={"device/power/runtime_status": "suspended"})
    tree.sata("sdb", "8:16", port=4, files={"device/power/runtime_status": "active"})
    tree.sata("sdc", "8:32", port=5)
    assert [asleep(tree.sys, name) for name in ("sda", "sdb", "sdc", "none")] == [True, False, False, False]


def test_missing_and_odd_files_leave_facts_unknown(tree: Tree):
    place = tree.sata(
        wwid=None,
        serial=None,
        files={
            "size": "many",
            "queue/rotational": "?",
            "device/vpd_pg80": b"\x00\x83\x00\x04ABCD",
            "device/wwid": "",
        },
    )
    (place / "device" / "model").unlink()
    disk = look(tree.sys, "sda")
    assert disk is not None
    assert (disk.model, disk.serial, disk.wwn, disk.capacity_bytes) == (None, None, None, None)
    assert disk.kind is Kind.HDD


def test_a_link_that_leads_nowhere_is_no_disk(tree: Tree):
    (tree.sys / "block" / "sdx").symlink_to(tree.sys / "devices" / "gone")
    (tree.sys / "block" / "sdy").symlink_to("sdy")
    assert look(tree.sys, "sdx") is None
    assert look(tree.sys, "sdy") is None
