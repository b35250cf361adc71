"""The layout is that of smartctl 7.3; the values are invented."""

import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.device_statistics import lacking, maximum_celsius, told, values
from diskwatch.machine.text import Sheet
from diskwatch.records import SignalKind, Value

LOG = """\
Device Statistics (GP Log 0x04)
Page  Offset Size        Value Flags Description
0x01  =====  =               =  ===  == General Statistics (rev 1) ==
0x01  0x008  4              25  ---  Lifetime Power-On Resets
0x01  0x010  4            9812  ---  Power-on Hours
0x01  0x018  6    148493136176  ---  Logical Sectors Written
0x01  0x028  6    138807723416  ---  Logical Sectors Read
0x01  0x038  6               -  ---  Date and Time TimeStamp
0x03  =====  =               =  ===  == Rotating Media Statistics (rev 1) ==
0x03  0x020  4              16  ---  Number of Reallocated Logical Sectors
0x03  0x030  4               -  ---  Number of Mechanical Start Failures
0x03  0x038  4               8  ---  Number of Realloc. Candidate Logical Sectors
0x04  =====  =               =  ===  == General Errors Statistics (rev 1) ==
0x04  0x008  4               3  ---  Number of Reported Uncorrectable Errors
0x04  0x010  4            1254  -D-  Resets Between Cmd Acceptance and Completion
0x05  =====  =               =  ===  == Temperature Statistics (rev 1) ==
0x05  0x008  1              34  ---  Current Temperature
0x05  0x020  1              54  ---  Highest Temperature
0x05  0x028  1              -5  ---  Lowest Temperature
0x05  0x058  1              70  ---  Specified Maximum Operating Temperature
0x06  =====  =               =  ===  == Transport Statistics (rev 1) ==
0x06  0x008  4             736  ---  Number of Hardware Resets
0x06  0x018  4            3026  ---  Number of Interface CRC Errors
0x07  =====  =               =  ===  == Solid State Device Statistics (rev 1) ==
0x07  0x008  1             106  N--  Percentage Used Endurance Indicator
                                |||_ C monitored condition met
                                ||__ D supports DSN
                                |___ N normalized value

"""
STATED = {
    "power-on-resets": 25,
    "power-on-hours": 9_812,
    "data-written": 148_493_136_176 * 512,
    "data-read": 138_807_723_416 * 512,
    "reallocated-sectors": 16,
    "pending-sectors": 8,
    "reported-uncorrectable": 3,
    "command-resets": 1_254,
    "temperature": 34,
    "highest-temperature": 54,
    "lowest-temperature": -5,
    "hardware-resets": 736,
    "crc-errors": 3_026,
    "percentage-used": 106,
}


def sheet(text: str) -> Sheet:
    return Sheet.of(text.splitlines())


def read(text: str, sector: int | None = 512) -> dict[str, Value]:
    return {value.signal: value for value in values(None, sheet(text), sector=sector)}


def document(**row: object) -> dict[str, object]:
    flags = {"valid": True, "normalized": False, **(row.pop("flags", None) or {})}  # type: ignore[dict-item] # a test's own
    return {"ata_device_statistics": {"pages": [{"number": 3, "table": [{**row, "flags": flags}]}]}}


def test_every_valid_field_of_the_text_is_read_and_no_other():
    found = read(LOG)
    assert {signal: value.value for signal, value in found.items()} == STATED
    assert {value.source for value in found.values()} == {"log 04h"}
    assert found["pending-sectors"].kind is SignalKind.GAUGE
    assert (found["data-written"].unit, found["reallocated-sectors"].unit) == ("bytes", "sectors")


def test_sectors_are_logical_ones_whatever_their_size_and_unknown_without_it():
    assert read(LOG, 4096)["data-read"].value == 138_807_723_416 * 4096
    unknown = read(LOG, None)["data-read"]
    assert unknown.value is None
    assert unknown.reason


def test_the_layout_of_old_versions_without_flags_is_read_too():
    old = (
        "Device Statistics (GP Log 0x04)\n"
        "Page Offset Size         Value  Description\n"
        "  3  =====  =                =  == Rotating Media Statistics (rev 1) ==\n"
        "  3  0x020  4                7  Number of Reallocated Logical Sectors\n"
        "  7  0x008  1               12~ Percentage Used Endurance Indicator\n"
    )
    assert {signal: one.value for signal, one in read(old).items()} == {
        "reallocated-sectors": 7,
        "percentage-used": 12,
    }


def test_a_table_of_another_log_is_not_taken_for_it():
    assert read(LOG.replace("Device Statistics (GP Log 0x04)", "Another Log (GP Log 0x99)")) == {}
    after = LOG.replace("0x01  0x010", "\n0x01  0x010")
    assert set(read(after)) == {"power-on-resets"}


def test_a_full_counter_and_an_impossible_value_are_not_known():
    for old, new, signal in (
        (" 3026  ---", f"{2**32 - 1}  ---", "crc-errors"),
        ("  34  ---", "-128  ---", "temperature"),
        (" 9812  ---", "9812000  ---", "power-on-hours"),
    ):
        value = read(LOG.replace(old, new))[signal]
        assert value.value is None, signal
        assert value.reason


def test_a_normalised_value_is_no_count():
    assert "crc-errors" not in read(LOG.replace("3026  ---", "3026  N--"))


def test_the_document_holds_where_it_has_the_log_and_only_valid_fields_count():
    row = {"offset": 32, "name": "Number of Reallocated Logical Sectors", "size": 4, "value": 99}
    (value,) = values(document(**row), sheet(LOG), sector=512)
    assert (value.signal, value.value) == ("reallocated-sectors", 99)
    assert values(document(**row, flags={"valid": False}), sheet(LOG), sector=512) == ()
    assert values(document(**row, flags={"normalized": True}), sheet(LOG), sector=512) == ()
    (named,) = values(document(name=row["name"], value=7), sheet(""), sector=512)
    assert (named.signal, named.value) == ("reallocated-sectors", 7)


@pytest.mark.parametrize(("stated", "limit"), [("70", 70), ("45", 45), ("40", None), ("0", None), ("-", None)])
def test_the_greatest_temperature_it_is_made_for_is_its_own_limit_unless_no_drive_is_made_for_so_little(
    stated, limit
):
    assert maximum_celsius(None, sheet(LOG.replace(" 70  ---", f" {stated}  ---"))) == limit


def test_whether_the_log_is_there_or_lacking_is_known_from_its_headline():
    assert told(None, sheet(LOG))
    assert told(document(offset=32, value=1), sheet(""))
    assert not told(None, sheet("Device Statistics (GP/SMART Log 0x04) not supported"))
    assert lacking(sheet("Device Statistics (GP/SMART Log 0x04) not supported"))
    assert not lacking(sheet(LOG))


@given(st.text(alphabet="0123456789x ->~-=NDCabc\n", max_size=200))
def test_anything_below_the_headline_is_survived_and_gives_only_what_stands_there(text):
    for value in read("Device Statistics (GP Log 0x04)\n" + text, 1).values():
        assert value.value is None or str(value.value) in text.replace(" 0", " ")
