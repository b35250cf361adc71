import pytest

from diskwatch.machine.identify import Identified, parse, remembered
from tests.machine.trees import AHCI, Tree, identify_words

WORDS = identify_words(
    model="INVENTED DISK 4000 LONGER NAME",
    serial="INV-A-0001",
    firmware="FW01AB12",
    wwn="5000f00000000001",
    turns=7200,
)


def test_a_whole_block_tells_all_that_the_scsi_face_cuts():
    assert parse(" ".join(WORDS)) == Identified(
        model="INVENTED DISK 4000 LONGER NAME",
        serial="INV-A-0001",
        firmware="FW01AB12",
        wwn="naa.5000f00000000001",
        rotating=True,
        rotation_rpm=7200,
        statistics=None,
    )


def test_a_solid_state_drive_says_one_turn_and_a_silent_drive_nothing():
    for turns, rotating in ((1, False), (0, None), (0x400, None), (0xFFFF, None)):
        found = parse(" ".join([*WORDS[:217], f"{turns:04x}", *WORDS[218:]]))
        assert found is not None
        assert found.rotating is rotating
        assert found.rotation_rpm is None


def test_a_name_that_word_87_does_not_vouch_for_is_not_used():
    for flags in ("0000", "c100", "0100", "4000"):
        found = parse(" ".join([*WORDS[:87], flags, *WORDS[88:]]))
        assert found is not None
        assert found.wwn is None


def test_what_is_no_block_or_an_empty_slot_is_none():
    assert parse("") is None
    assert parse(" ".join(WORDS[:-1])) is None
    assert parse(" ".join(["zzzz", *WORDS[1:]])) is None
    assert parse(" ".join(["0000"] * 256)) is None


def test_two_drives_on_one_port_are_not_guessed_between(tree: Tree):
    tree.sata(port=3, identify=WORDS)
    port = tree.sys / AHCI / "ata7"
    assert remembered(port) is not None
    tree.put(port / "link7" / "dev7.1" / "ata_device" / "dev7.1" / "id", " ".join(WORDS))
    assert remembered(port) is None


@pytest.mark.parametrize(
    ("standards", "features", "has"),
    [
        (0x03F0, 0x4020, True),  # up to ACS-2, with logs
        (0x07F0, 0x6163, True),
        (0x01F0, 0x4020, False),  # no later than ATA8-ACS
        (0x03F0, 0x4000, False),  # no general purpose logs
        (0x03F0, 0x0020, None),  # word 84 is not valid
        (0x0000, 0x4020, None),
        (0xFFFF, 0x4020, None),
    ],
)
def test_device_statistics_are_foretold_by_the_standard_and_the_log_feature(standards, features, has):
    words = [*WORDS]
    words[80], words[84] = f"{standards:04x}", f"{features:04x}"
    found = parse(" ".join(words))
    assert found is not None
    assert found.statistics is has
