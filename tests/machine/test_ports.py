from pathlib import Path

import pytest

from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.ports import bay_of
from tests.machine.trees import Tree


def bay(tree: Tree) -> str | None:
    (drive,) = physical_drives(tree.sys)
    return drive.place.bay


def test_an_ahci_port_is_counted_on_its_own_controller(tree: Tree):
    tree.sata(port=3)
    assert bay(tree) == "pci-0000:00:17.0-ata-3"


def test_an_nvme_drive_is_in_the_slot_nearest_to_it(tree: Tree):
    tree.nvme()
    assert bay(tree) == "pci-0000:01:00.0 nvme"


def test_a_usb_drive_is_on_the_port_that_the_hub_chain_ends_in(tree: Tree):
    tree.usb(port="1-4.2")
    assert bay(tree) == "usb 1-4.2"


def test_a_sas_drive_is_in_the_bay_that_the_enclosure_tells(tree: Tree):
    tree.sas(bay=5)
    assert bay(tree) == "pci-0000:02:00.0-sas-bay-5"


def test_a_sas_drive_behind_an_expander_is_at_the_end_of_its_chain(tree: Tree):
    tree.sas(end="0:3")
    assert bay(tree) == "pci-0000:02:00.0-sas-0:3"


def test_a_virtual_disk_is_on_its_own_bus(tree: Tree):
    tree.virtio()
    assert bay(tree) == "virtio1"


@pytest.mark.parametrize(
    ("path", "expected"),
    [
        (
            "devices/pci0000:00/0000:00:01.1/ata1/host0/target0:0:1/0:0:1:0/block/sda",
            "pci-0000:00:01.1-ata-1.1",
        ),
        ("devices/platform/soc/f220.sata/ata1/host0/target0:0:0/0:0:0:0/block/sda", "f220.sata-ata-1"),
        ("devices/pci0000:00/0000:03:00.0/host0/target0:2:7/0:2:7:0/block/sda", "pci-0000:03:00.0-scsi-2:7:0"),
        ("devices/pci0000:00/0000:00:05.0/virtio2/host2/target2:0:1/2:0:1:0/block/sda", "virtio2-scsi-0:1:0"),
        ("devices/vbd-768/block/xvda", "vbd-768"),
        ("devices/platform/emmc/mmc_host/mmc0/mmc0:0001/block/mmcblk0", "mmc0"),
        ("devices/odd/block/odd0", None),
    ],
)
def test_other_buses_have_a_readable_bay_or_none(path: str, expected: str | None):
    assert bay_of(Path("/nowhere"), tuple(path.split("/"))) == expected
