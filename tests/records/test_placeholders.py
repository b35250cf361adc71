import pytest

from diskwatch.records.placeholders import empty_serial, empty_wwn


@pytest.mark.parametrize(
    "text",
    [
        None,
        "",
        "   ",
        "XXXXXXXX",
        "0000000",
        "0",
        "AAAA",
        "none",
        "None",
        "N/A",
        "Unknown",
        "Serial Number",
        "0x00000000",
        "--",
    ],
)
def test_a_serial_that_stands_for_nothing_is_empty(text):
    assert empty_serial(text)


@pytest.mark.parametrize("text", ["INVENTED-1", "PKXXXXXXXXXXGB", "00001", "AB 12", "0123456789"])
def test_a_serial_with_anything_of_its_own_is_not(text):
    assert not empty_serial(text)


@pytest.mark.parametrize("wwn", [None, "", "naa.", "naa.5000000000000000", "naa.ffffffffffffffff", "eui.0000"])
def test_a_world_wide_name_of_filling_is_empty(wwn):
    assert empty_wwn(wwn)


@pytest.mark.parametrize("wwn", ["naa.5000c500a0000001", "eui.0000000000000001", "uuid.1234-ab"])
def test_a_world_wide_name_with_anything_of_its_own_is_not(wwn):
    assert not empty_wwn(wwn)
