import pytest

from diskwatch.machine.choice import asked, named, watched
from diskwatch.machine.protocol import Address, Found
from diskwatch.records import Drive, Identity, Kind, Place

IDENTITY = Identity(wwn="naa.5000f00000000001", model="INVENTED", serial="Inv-A 01", path="/dev/sda")
FOUND = Found(
    address=Address(node="/dev/nvme0", type="nvme"),
    blocks=("nvme0n1",),
    place=Place(device="/dev/nvme0"),
    drive=Drive(identity=IDENTITY, kind=Kind.NVME),
)


@pytest.mark.parametrize(
    "name",
    [
        "inv-a 01",
        " INV-A  01 ",
        "naa.5000F00000000001",
        "5000f00000000001",
        "0x5000f00000000001",
        "/dev/sda",
        "sda",
    ],
)
def test_a_drive_is_named_by_serial_world_wide_name_or_device(name: str):
    assert named(IDENTITY, (), [name])


@pytest.mark.parametrize("name", ["inv-a", "5000f0", "/dev/sdaa", "sdb", "", "INVENTED"])
def test_a_part_of_a_name_or_the_model_names_nothing(name: str):
    assert not named(IDENTITY, (), [name])


def test_a_drive_without_serial_is_not_named_by_an_empty_word():
    assert not named(Identity(wwn=None, model=None, serial=None, path="/dev/sda"), (), ["", "naa.", "None"])


def test_ignore_outweighs_only_and_no_only_means_all():
    assert watched(IDENTITY, (), only=(), ignore=())
    assert watched(IDENTITY, (), only=("sda",), ignore=())
    assert not watched(IDENTITY, (), only=("sdb",), ignore=())
    assert not watched(IDENTITY, (), only=("sda",), ignore=("Inv-A 01",))


def test_a_namespace_names_its_drive():
    assert not asked(FOUND, settled=True, only=(), ignore=("/dev/nvme0n1",))
    assert asked(FOUND, settled=True, only=("nvme0n1",), ignore=())


def test_a_drive_that_may_yet_turn_out_to_be_meant_is_asked_unless_ignored():
    assert asked(FOUND, settled=False, only=("INV-OTHER",), ignore=())
    assert not asked(FOUND, settled=True, only=("INV-OTHER",), ignore=())
    assert not asked(FOUND, settled=False, only=("INV-OTHER",), ignore=("/dev/nvme0",))
