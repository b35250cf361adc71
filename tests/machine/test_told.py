from dataclasses import replace

import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.held import Family
from diskwatch.machine.text import Sheet
from diskwatch.machine.told import drive_of, family_of, merged, serial_of
from diskwatch.records import Drive, Identity, Kind
from tests.machine.recordings import FIXTURES, text_of


def sheet(name: str, *changes: tuple[str, str]) -> Sheet:
    text = text_of(FIXTURES / name / "all.txt")
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    return Sheet.of(text.splitlines())


def drive(
    kind: Kind = Kind.HDD,
    *,
    wwn: str | None = None,
    model: str | None = None,
    serial: str | None = None,
    rpm: int | None = None,
) -> Drive:
    identity = Identity(wwn=wwn, model=model, serial=serial, path="/dev/sdx")
    return Drive(identity=identity, kind=kind, rotation_rpm=rpm)


@pytest.mark.parametrize("text", ["", "   ", "[No Information Found]", "\x01\x02A"])
def test_a_serial_that_is_not_stated_is_none(text: str):
    assert serial_of(text) is None


@pytest.mark.parametrize("text", ["INVENTED-1", "PKXXXXXXXXXXGB", "00001", "  AB 12  ", "XXXXXXXX", "0"])
def test_a_serial_is_kept_as_it_stands_but_for_outer_blanks(text: str):
    assert serial_of(text) == text.strip()


@pytest.mark.parametrize(
    ("text", "serial"),
    [
        ("INV\x7f\x9d0;x\x07-KR-0012", "INV0;x-KR-0012"),
        ("\x01 AB\u202e12 \x02", "AB12"),
        ("A\x00", "A"),
        ("\x01A", None),
        ("\x01\x02", None),
        ("\x1b[No Information Found]", None),
    ],
)
def test_what_can_be_shown_of_a_serial_is_kept_though_a_control_character_stands_in_it(
    text: str, serial: str | None
):
    assert serial_of(text) == serial


def test_a_model_with_a_control_character_in_it_is_kept_and_nothing_else_of_the_drive_is_lost():
    changed = sheet(
        "invented_hdd_failing",
        ("Tundra BT4000", "Tun\x9b2Jdra\u202e BT4000"),
        ("INVENTED-BT", "INV\x07ENTED-BT"),
    )
    found = drive_of(Family.ATA, None, changed, "/dev/x")
    plain = drive_of(Family.ATA, None, sheet("invented_hdd_failing"), "/dev/x")
    assert found is not None
    assert plain is not None
    assert found == replace(plain, identity=replace(plain.identity, model="Borealis Tun2Jdra BT4000"))


def test_a_name_longer_than_any_drive_has_room_for_is_none():
    assert serial_of("AB" * 60) is not None
    assert serial_of("AB" * 61) is None


@given(st.text(max_size=30))
def test_a_serial_never_holds_what_a_terminal_might_act_on(text: str):
    found = serial_of(text)
    assert found is None or found.isprintable()


@pytest.mark.parametrize(
    ("name", "family"),
    [
        ("invented_hdd_failing", Family.ATA),
        ("invented_nvme_hot", Family.NVME),
        ("invented_sas_megaraid_failing", Family.SCSI),
        ("invented_virtual_no_smart", Family.ATA),
    ],
)
def test_the_family_is_seen_in_the_text_without_any_type(name: str, family: Family):
    assert family_of(None, sheet(name), None) is family


def test_what_was_answered_decides_on_the_family_before_how_it_was_asked():
    told = {"device": {"protocol": "SCSI"}}
    assert family_of(told, sheet("invented_hdd_failing"), "megaraid,7") is Family.ATA
    assert family_of({**told, "nvme_version": {"string": "1.4"}}, Sheet.of([]), "scsi") is Family.NVME
    assert family_of(told, Sheet.of([]), "nvme") is Family.SCSI
    assert family_of(None, Sheet.of([]), "sntasmedia") is Family.NVME
    assert family_of(None, Sheet.of([]), "scsi") is Family.SCSI
    assert family_of(None, Sheet.of([]), "sat") is Family.ATA


def test_world_wide_names_are_written_as_linux_writes_them():
    named = {
        "invented_hdd_failing": (Family.ATA, "naa.5fffff0000000001"),
        "invented_nvme_hot": (Family.NVME, "eui.fffff00000000063"),
        "invented_sas_megaraid_failing": (Family.SCSI, "naa.5fffff0000000041"),
    }
    for name, (family, wwn) in named.items():
        found = drive_of(family, None, sheet(name), "/dev/x")
        assert found is not None
        assert found.identity.wwn == wwn


def test_a_world_wide_name_of_zeros_or_of_no_known_form_is_none():
    for new in ("0 000000 000000000", "5 000000 000000000", "5 fffff0 00000001", "f fffff0 000000001"):
        found = drive_of(Family.ATA, None, sheet("invented_hdd_failing", ("5 fffff0 000000001", new)), "/dev/x")
        assert found is not None
        assert found.identity.wwn is None


def test_the_model_of_a_scsi_drive_is_vendor_and_product():
    found = drive_of(Family.SCSI, None, sheet("invented_sas_megaraid_failing"), "/dev/x")
    assert found is not None
    assert (found.identity.model, found.kind, found.firmware) == ("NORDWALL NW10K600", Kind.SAS, "N003")


def test_a_scsi_drive_that_names_no_transport_is_taken_for_sas():
    told = sheet("invented_sas_megaraid_failing", ("Transport protocol:   SAS (SPL-4)\n", ""))
    found = drive_of(Family.SCSI, None, told, "/dev/x")
    assert found is not None
    assert found.kind is Kind.SAS


def test_a_serial_that_stands_for_nothing_gives_way_to_one_that_the_kernel_knows():
    behind = drive(serial="XXXXXXXX")
    assert merged(drive(serial="INV-7"), behind).identity.serial == "INV-7"
    assert merged(drive(serial="0000"), behind).identity.serial == "XXXXXXXX"
    assert merged(drive(), behind).identity.serial == "XXXXXXXX"


def test_an_answer_that_names_no_drive_gives_none():
    assert drive_of(Family.ATA, None, Sheet.of(["smartctl 7.3"]), "/dev/x") is None


def test_a_volume_that_a_controller_makes_up_is_virtual():
    found = drive_of(Family.SCSI, None, sheet("megaraid_vd_0"), "/dev/x")
    assert found is not None
    assert found.kind is Kind.VIRTUAL


def test_an_additional_product_id_is_not_taken_for_the_model():
    found = drive_of(
        Family.ATA,
        None,
        sheet("invented_hdd_failing", ("Firmware Version:", "Add. Product Id:  oemlabel\nFirmware Version:")),
        "/dev/x",
    )
    assert found is not None
    assert found.identity.model == "Borealis Tundra BT4000"


def test_what_the_drive_says_comes_first_and_the_kernel_fills_gaps():
    kernel = replace(
        drive(wwn="naa.5000000000000001", model="KERNEL", serial="K1"), capacity_bytes=10, firmware="k"
    )
    told = drive(model="TOLD", serial="T1", rpm=7_200)
    both = merged(kernel, told)
    assert both.identity == Identity(wwn="naa.5000000000000001", model="TOLD", serial="T1", path="/dev/sdx")
    assert (both.capacity_bytes, both.firmware, both.rotation_rpm) == (10, "k", 7_200)


def test_an_nvme_drive_keeps_the_name_that_the_kernel_formed():
    kernel = drive(Kind.NVME, wwn="eui.00000000000000010000000000000002")
    told = drive(Kind.NVME, wwn="eui.0000000000000001")
    assert merged(kernel, told).identity.wwn == "eui.00000000000000010000000000000002"
    assert merged(drive(Kind.NVME), told).identity.wwn == "eui.0000000000000001"


@pytest.mark.parametrize(
    ("kernel", "told", "rpm", "kind"),
    [
        (Kind.USB, Kind.SSD, None, Kind.USB),
        (Kind.USB, Kind.HDD, 5_400, Kind.USB),
        (Kind.USB, Kind.NVME, None, Kind.NVME),
        (Kind.VIRTUAL, Kind.HDD, None, Kind.VIRTUAL),
        (Kind.HDD, Kind.VIRTUAL, None, Kind.VIRTUAL),
        (Kind.HDD, Kind.SSD, None, Kind.SSD),
        (Kind.SSD, Kind.HDD, 7_200, Kind.HDD),
        (Kind.SSD, Kind.HDD, None, Kind.SSD),
        (Kind.SAS, Kind.SSD, None, Kind.SSD),
        (Kind.HDD, Kind.SAS, 10_000, Kind.SAS),
    ],
)
def test_the_kind_is_the_first_that_either_is_sure_of(kernel: Kind, told: Kind, rpm: int | None, kind: Kind):
    both = merged(drive(kernel), drive(told, serial="T1", rpm=rpm))
    assert both.kind is kind
    assert both.rotation_rpm == rpm
