import re

import pytest

from diskwatch.machine import meanings
from diskwatch.records import SignalKind

CONTRACT = {
    *("reallocated-sectors", "pending-sectors", "offline-uncorrectable", "reported-uncorrectable"),
    *("command-timeouts", "crc-errors", "spin-retries", "end-to-end-errors", "media-errors"),
    *("error-log-entries", "percentage-used", "available-spare", "critical-warning", "unsafe-power-offs"),
    *("power-cycles", "power-on-hours", "temperature", "data-written", "data-read", "grown-defects"),
    "non-medium-errors",
}


def known_signals() -> set[str]:
    named = {meaning.signal for meaning in (*meanings.ATA, meanings.RETRACTS)}
    logged = {meaning.signal for meaning in (*meanings.NVME, *meanings.SCSI)}
    return named | logged | {signal for signal, _ in meanings.VOLUMES.values()}


def test_every_signal_that_others_rely_on_has_a_meaning():
    assert known_signals() >= CONTRACT


def test_signals_are_lower_case_words_joined_by_hyphens():
    assert not [signal for signal in known_signals() if re.fullmatch(r"[a-z]+(-[a-z]+)*", signal) is None]


def test_every_meaning_has_a_unit_and_every_attribute_a_source():
    for meaning in meanings.ATA:
        assert meaning.unit
        assert meaning.source
        assert all(0 < number < 256 for number in meaning.numbers)
    for logged in (*meanings.NVME, *meanings.SCSI):
        assert logged.unit
        assert logged.labels


def test_the_same_signal_is_of_the_same_kind_in_every_family():
    kinds: dict[str, set[SignalKind]] = {}
    for meaning in meanings.ATA:
        kinds.setdefault(meaning.signal, set()).add(meaning.kind)
    for logged in (*meanings.NVME, *meanings.SCSI):
        kinds.setdefault(logged.signal, set()).add(logged.kind)
    assert not {signal: found for signal, found in kinds.items() if len(found) > 1}


# Names from smartctl 7.3's own table of drives, and what they must and must not be taken for.
@pytest.mark.parametrize(
    ("number", "name", "signal"),
    [
        (5, "Reallocated_Sector_Ct", "reallocated-sectors"),
        (5, "Reallocate_NAND_Blk_Cnt", "reallocated-sectors"),
        (5, "Retired_Block_Count", "reallocated-sectors"),
        (5, "Not_In_Use", None),
        (9, "Power_On_Hours_and_Msec", "power-on-hours"),
        (9, "Power_On_Half_Minutes", "power-on-hours"),
        (9, "Proprietary_9", None),
        (174, "Unexpect_Power_Loss_Ct", "unsafe-power-offs"),
        (174, "Pwr_Cycle_Ct_Unplanned", "unsafe-power-offs"),
        (174, "Host_Reads_MiB", None),
        (184, "Initial_Bad_Block_Count", None),
        (187, "Uncorrectable_Error_Cnt", "reported-uncorrectable"),
        (187, "Total_Unc_NAND_Reads", None),
        (190, "SATA_Error_Ct", None),
        (190, "Drive_Temp_Warning", None),
        (190, "Airflow_Temperature_Cel", "temperature"),
        (192, "Init_Spare_Blocks_Avail", None),
        (193, "Load_Cycle_Count", "load-cycles"),
        (194, "Temperature_Celsius_x10", None),
        (194, "Fractional_Temperature", None),
        (196, "Total_Erase_Failures", None),
        (197, "Total_Pending_Sectors", "pending-sectors"),
        (197, "Total_Unc_Read_Failures", None),
        (197, "ECC_Error_Count", None),
        (198, "Offline_Uncorrectable", "offline-uncorrectable"),
        (198, "Total_Offl_Uncorrectabl", "offline-uncorrectable"),
        (198, "Host_Reads_GiB", None),
        (199, "SATA_CRC_Error_Count", "crc-errors"),
        (199, "Host_Writes_GiB", None),
        (199, "Write_Sectors_Tot_Ct", None),
        (188, "Command_Timeout", "command-timeouts"),
        (10, "SATA_CRC_Error_Count", None),
    ],
)
def test_a_row_counts_only_where_its_name_says_what_its_number_is_known_for(
    number: int, name: str, signal: str | None
):
    found = {
        meaning.signal for meaning in meanings.ATA if number in meaning.numbers and meaning.name.search(name)
    }
    assert found == ({signal} if signal is not None else set())


@pytest.mark.parametrize(
    "name", ["Percent_Lifetime_Remain", "SSD_Life_Left", "Remaining_Lifetime_Perc", "Media_Wearout_Indicator"]
)
def test_names_of_life_that_is_left_are_not_taken_for_life_used(name: str):
    assert meanings.LEFT_BY_NAME.search(name)
    assert not meanings.USED_BY_NAME.search(name)


@pytest.mark.parametrize(
    "name", ["Percent_Lifetime_Used", "Perc_Rated_Life_Used", "DriveLife_Used", "Percent_Life_Used"]
)
def test_names_of_life_used_are_not_taken_for_life_left(name: str):
    assert meanings.USED_BY_NAME.search(name)
    assert not meanings.LEFT_BY_NAME.search(name)


def test_flash_writes_are_never_taken_for_what_the_host_wrote():
    for name in meanings.VOLUMES:
        assert re.search(r"nand|flash|tlc|slc", name) is None
