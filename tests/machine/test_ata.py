import pytest

from diskwatch.machine import ata, packing
from diskwatch.machine.held import Family, device_of
from diskwatch.machine.text import Sheet
from diskwatch.records import Attribute, Failing, SignalKind, Value

HEAD = """Sector Size:      512 bytes logical/physical
Device is:        {known}
Vendor Specific SMART Attributes with Thresholds:
ID# ATTRIBUTE_NAME          FLAG     VALUE WORST THRESH TYPE      UPDATED  WHEN_FAILED RAW_VALUE
"""


def sheet(*rows: str, known: str = "Not in smartctl database 7.3/5319") -> Sheet:
    return Sheet.of([*HEAD.format(known=known).splitlines(), *rows])


def row(number: int, name: str, raw: str, *, value: str = "100", flags: str = "0x0032") -> str:
    return f"{number:3} {name:<23} {flags}   {value}   {value}   000    Old_age   Always       -       {raw}"


def values(
    *rows: str, flash: bool = False, known: str = "Not in smartctl database 7.3/5319"
) -> dict[str, Value]:
    told = sheet(*rows, known=known)
    found = ata.values(ata.attributes(None, None, told), None, told, flash=flash)
    assert len({value.signal for value in found}) == len(found)
    return {value.signal: value for value in found}


def test_rows_without_a_normalised_value_are_kept_though_the_library_loses_them():
    told = sheet("  5 Reallocated_Sector_Ct   0x0032   ---   ---   ---    Old_age   Always       -       8")
    assert ata.attributes(None, None, told) == (
        Attribute(
            number=5,
            name="Reallocated_Sector_Ct",
            value=None,
            worst=None,
            threshold=None,
            prefail=False,
            raw="8",
        ),
    )


@pytest.mark.parametrize(
    "broken",
    [
        "  1 Raw_Read_Error_Rate     0x002f   100 55  100   006    Pre-fail  Always       -       0",
        "192 Power-Off_Retract_Count 0x0032   100   1  000    Old_age   Always       -       1490",
    ],
)
def test_a_row_whose_columns_are_broken_is_left_out_and_not_shifted_as_the_library_does(broken: str):
    told = sheet(row(5, "Reallocated_Sector_Ct", "8"), broken)
    device = device_of(told.lines, Family.ATA)
    assert device is not None
    assert len([one for one in device.attributes if one is not None]) == 2
    assert [one.number for one in ata.attributes(None, device, told)] == [5]


def test_the_brief_table_is_read_as_well():
    told = sheet("  5 Reallocated_Sector_Ct   PO--CK   041   041   140    NOW  1265")
    (found,) = ata.attributes(None, None, told)
    assert (found.prefail, found.failing, found.raw, found.threshold) == (True, Failing.NOW, "1265", 140)


def test_a_failure_in_the_past_is_told_from_one_now():
    told = sheet("  5 Reallocated_Sector_Ct   0x0033   141   041   140    Pre-fail  Always   In_the_past 1265")
    assert ata.attributes(None, None, told)[0].failing is Failing.PAST


def test_194_comes_before_190_unless_it_says_nothing():
    both = values(
        row(190, "Airflow_Temperature_Cel", "33"), row(194, "Temperature_Celsius", "31 (Min/Max 9/40)")
    )
    assert (both["temperature"].value, both["temperature"].source) == (31, "attribute 194")
    broken = values(row(190, "Airflow_Temperature_Cel", "33"), row(194, "Temperature_Celsius", "250"))
    assert (broken["temperature"].value, broken["temperature"].source) == (33, "attribute 190")


def test_a_row_under_another_name_is_left_out_rather_than_misread():
    found = values(row(198, "Host_Reads_GiB", "900"), row(199, "Write_Sectors_Tot_Ct", "77"))
    assert "offline-uncorrectable" not in found
    assert "crc-errors" not in found
    assert found["data-read"].value == 900 * 2**30


def test_a_full_counter_is_none_with_a_reason_and_not_zero():
    found = values(row(199, "UDMA_CRC_Error_Count", "65535"))["crc-errors"]
    assert found.value is None
    assert found.reason


def test_retracts_are_followed_only_on_drives_that_have_heads():
    line = row(192, "Power-Off_Retract_Count", "61")
    assert values(line)["power-off-retracts"].value == 61
    assert "power-off-retracts" not in values(line, flash=True)


@pytest.mark.parametrize(
    ("name", "step"),
    [
        ("Total_LBAs_Written", 512),
        ("Host_Writes_32MiB", 2**25),
        ("Host_Writes_GiB", 2**30),
        ("Host_Writes_MiB", 2**20),
    ],
)
def test_data_written_is_counted_in_the_unit_that_the_name_states(name: str, step: int):
    assert values(row(241, name, "5000000"))["data-written"].value == 5_000_000 * step


def test_flash_writes_and_gigabytes_of_unknown_size_are_no_host_writes():
    assert "data-written" not in values(
        row(241, "Nand_Sectors_Written", "77"), row(233, "Total_Writes_GB", "9")
    )


def test_an_unknown_packing_keeps_the_raw_value_of_which_only_changes_mean_anything():
    found = values(row(9, "Power_On_Hours", str((7 << 24) | 900)), row(188, "Command_Timeout", "70000"))
    for signal, raw in (("power-on-hours", (7 << 24) | 900), ("command-timeouts", 70_000)):
        assert (found[signal].value, found[signal].reason) == (None, packing.PACKED)
        kept = found[f"raw-{signal}"]
        assert (kept.value, kept.unit, kept.kind) == (raw, "opaque", SignalKind.GAUGE)
    assert not [signal for signal in values(row(9, "Power_On_Hours", "900")) if signal.startswith("raw-")]


def test_what_stands_beside_the_main_value_is_told_where_it_is_there():
    found = values(row(188, "Command_Timeout", "2 5 9"), row(194, "Temperature_Celsius", "40 (Min/Max 17/58)"))
    assert {signal: value.value for signal, value in found.items()} == {
        "command-timeouts": 9,
        "slow-commands": 5,
        "slower-commands": 2,
        "temperature": 40,
        "lowest-temperature": 17,
        "highest-temperature": 58,
    }


def test_errors_that_log_04h_denies_and_the_table_counts_are_told_both_ways():
    log = (
        "",
        "Device Statistics (GP Log 0x04)",
        "0x03  0x020  4               0  ---  Number of Reallocated Logical Sectors",
        "0x04  0x008  4               5  ---  Number of Reported Uncorrectable Errors",
    )
    found = values(row(5, "Reallocated_Sector_Ct", "2264"), row(187, "Reported_Uncorrect", "5"), *log)
    told = {signal: (value.value, value.source) for signal, value in found.items()}
    assert told == {
        "reallocated-sectors": (0, "log 04h"),
        "reallocated-sectors-by-attribute": (2264, "attribute 5"),
        "reported-uncorrectable": (5, "log 04h"),
    }


KNOWN = "In smartctl database 7.3/5319"


@pytest.mark.parametrize(
    ("line", "used"),
    [
        (row(202, "Percent_Lifetime_Remain", "8", value="092"), 8),
        (row(231, "SSD_Life_Left", "97", value="097"), 3),
        (row(233, "Media_Wearout_Indicator", "0", value="086"), 14),
        (row(202, "Percent_Lifetime_Used", "104", value="001"), 104),
    ],
)
def test_wear_is_the_share_of_rated_life_that_is_used_up(line: str, used: int):
    assert values(line, known=KNOWN, flash=True)["percentage-used"].value == used


def test_a_name_that_smartctl_gives_any_unknown_drive_proves_no_wear():
    line = row(233, "Media_Wearout_Indicator", "1053")
    assert "percentage-used" not in values(line, flash=True)
    assert "available-spare" not in values(row(232, "Available_Reservd_Space", "100"), flash=True)


def test_a_normalised_value_beyond_a_hundred_is_no_share():
    assert "percentage-used" not in values(row(231, "SSD_Life_Left", "1", value="253"), known=KNOWN)
    assert "percentage-used" not in values(row(231, "SSD_Life_Left", "1", value="000"), known=KNOWN)


@pytest.mark.parametrize(
    ("line", "count"),
    [
        ("No Errors Logged", 0),
        ("ATA Error Count: 2", 2),
        ("ATA Error Count: 812 (device log contains only the most recent five errors)", 812),
    ],
)
def test_the_error_log_gives_its_count(line: str, count: int):
    told = Sheet.of([line])
    (found,) = ata.values((), None, told, flash=False)
    assert (found.signal, found.value) == ("error-log-entries", count)


def test_an_error_log_that_is_not_sound_gives_no_count():
    told = Sheet.of(["ATA Error Count: 0 (possibly also invalid)"])
    (found,) = ata.values((), None, told, flash=False)
    assert found.value is None
    assert found.reason
