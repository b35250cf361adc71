import json
import random
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings, strategies as st

from diskwatch.machine import ata, logs
from diskwatch.machine.document import document_of, plain_lines
from diskwatch.machine.reading import Support, Understood, understood
from tests.machine import witness
from tests.machine.mutations import mutated
from tests.machine.recordings import (
    FIXTURES,
    SHARED,
    answers,
    name_of,
    text_of,
    truth_of,
)
from tests.machine.test_device_statistics import LOG as STATISTICS_LOG, STATED as STATISTICS

ANSWERS = answers()
# Of these the text states a number whose unit, or whose being reported at all, is not known.
UNSURE = {"data-read", "data-written"}


def read(text: str, document: Any = None, type_: str | None = None) -> Understood:
    return understood(text.splitlines(), document, type_=type_, path="/dev/x")


def fixture(name: str) -> str:
    return text_of(FIXTURES / name)


@pytest.mark.parametrize("path", ANSWERS, ids=name_of)
def test_every_answer_is_read_as_its_text_says(path: Path):
    text = text_of(path)
    truth, found = truth_of(text), read(text)
    if truth.model is None:
        assert found.drive is None
        return
    drive = found.drive
    assert drive is not None
    assert (drive.identity.model, drive.identity.serial) == (truth.model, truth.serial)
    assert (drive.identity.wwn, drive.firmware) == (truth.wwn, truth.firmware)
    assert drive.capacity_bytes == truth.capacity
    if found.support is Support.NONE:
        assert not found.says_something
        return
    values = {value.signal: value for value in found.reading.values}
    for signal, number in truth.signals.items():
        value = values[signal]
        assert value.value == number or (signal in UNSURE and value.value is None and value.reason), signal
    if truth.assessment is not None:
        assert values["self-assessment"].value == truth.assessment
    assert len(found.reading.self_tests) == truth.tests


@pytest.mark.parametrize("path", ANSWERS, ids=name_of)
def test_every_attribute_row_is_kept_as_printed(path: Path):
    text = text_of(path)
    rows = truth_of(text).rows
    found = {row.number: row for row in read(text).reading.attributes}
    assert set(found) == set(rows)
    for number, words in rows.items():
        row = found[number]
        assert (row.name, row.raw.split()) == (words[1], words[9:])
        assert (row.value, row.worst) == (int(words[3]), int(words[4]))
        assert row.threshold == (None if words[5] == "---" else int(words[5]))
        assert row.prefail is (words[6] == "Pre-fail")
        assert (row.failing is not None) is (words[8] != "-")


@pytest.mark.parametrize("path", ANSWERS, ids=name_of)
def test_no_value_is_invented_and_none_stands_without_a_reason(path: Path):
    text = text_of(path)
    found = read(text)
    values = found.reading.values
    witness.check(found, text.splitlines())
    assert len({value.signal for value in values}) == len(values)
    for value in values:
        assert value.unit
        assert value.source


@pytest.mark.skipif(not SHARED.is_dir(), reason="the shared recordings are not here")
def test_the_shared_recordings_are_among_the_answers():
    assert sum(SHARED in path.parents for path in ANSWERS) >= 35


def test_a_failed_and_a_sound_sister_are_told_apart():
    failed, sister = read(fixture("invented_hdd_failing/all.txt")), read(fixture("invented_hdd_sister/all.txt"))
    assert failed.reading.get("self-assessment") == "failed"
    assert sister.reading.get("self-assessment") == "passed"
    assert [row.number for row in failed.reading.attributes if row.failing is not None] == [5]
    assert not [row for row in sister.reading.attributes if row.failing is not None]


def test_a_status_that_the_drive_does_not_give_is_neither_passed_nor_failed():
    text = fixture("invented_hdd_sister/all.txt").replace("test result: PASSED", "test result: UNKNOWN!")
    values = {value.signal: value for value in read(text).reading.values}
    assert values["self-assessment"].value is None
    assert values["self-assessment"].reason


def test_an_nvme_verdict_names_the_critical_warning_as_its_source():
    found = read(fixture("invented_nvme_hot/all.txt"))
    values = {value.signal: value for value in found.reading.values}
    assert (values["self-assessment"].value, values["self-assessment"].source) == ("failed", "critical warning")
    assert values["critical-warning"].value == 2
    assert (found.reading.warning_celsius, found.reading.critical_celsius) == (82, 88)


def test_a_newest_self_test_that_met_an_unreadable_sector_is_marked_so():
    newest = read(fixture("invented_hdd_unreadable/all.txt")).reading.self_tests[0]
    assert (newest.passed, newest.unreadable, newest.extended) == (False, True, True)
    assert (newest.hours, newest.lba) == (25_040, 163_736_384)


def test_smart_that_is_switched_off_or_lacking_is_told_apart():
    text = fixture("invented_hdd_sister/all.txt")
    assert read(text).support is Support.ON
    assert read(text.replace("SMART support is: Enabled", "SMART support is: Disabled")).support is Support.OFF
    assert read(fixture("invented_virtual_no_smart/all.txt")).support is Support.NONE


def test_an_empty_answer_says_nothing():
    found = understood((), None, type_=None, path="/dev/x")
    assert (found.drive, found.says_something, found.support) == (None, False, Support.UNSAID)


def document(name: str) -> Any:
    found = document_of(fixture(name))
    assert found is not None
    return found


def test_the_document_and_the_text_in_it_agree_signal_by_signal():
    told = document("invented_nvme_json/document.json")
    with_document = understood(plain_lines(told), told, type_="nvme", path="/dev/x")
    text_alone = read(fixture("invented_nvme_json/all.txt"))
    document_alone = understood((), told, type_="nvme", path="/dev/x")
    assert with_document.reading == text_alone.reading
    shared = {value.signal: value for value in document_alone.reading.values}
    for value in text_alone.reading.values:
        if value.signal in shared:
            assert shared[value.signal] == value
    assert len(shared) >= 15
    assert document_alone.drive == text_alone.drive


def test_where_document_and_text_differ_the_document_holds():
    told = json.loads(fixture("invented_nvme_json/document.json"))
    told["nvme_smart_health_information_log"]["data_units_written"] = 2**100 + 1
    told["serial_number"] = "INVENTED-OTHER"
    told["smart_status"] = {"passed": False}
    found = understood(plain_lines(told), told, type_="nvme", path="/dev/x")
    assert found.reading.get("data-written") == (2**100 + 1) * 512_000
    assert found.reading.get("self-assessment") == "failed"
    assert found.drive is not None
    assert found.drive.identity.serial == "INVENTED-OTHER"


ATA_DOCUMENT = {
    # Laid out as smartctl 7.3 does; the drive is invented.
    "device": {"name": "/dev/sdx", "type": "sat", "protocol": "ATA"},
    "model_name": "Borealis Tundra BT4000",
    "serial_number": "INVENTED-BT-0099",
    "wwn": {"naa": 5, "oui": 0xFFFFF0, "id": 0x99},
    "firmware_version": "BT04.7",
    "user_capacity": {"blocks": 7_814_037_168, "bytes": 4_000_787_030_016},
    "logical_block_size": 512,
    "rotation_rate": 5_900,
    "smart_support": {"available": True, "enabled": True},
    "smart_status": {"passed": True},
    "temperature": {"current": 37},
    "ata_smart_attributes": {
        "revision": 16,
        "table": [
            {
                "id": number,
                "name": name,
                "value": value,
                "worst": value,
                "thresh": threshold,
                "when_failed": failed,
                "flags": {"value": 51, "prefailure": number == 5, "updated_online": True},
                "raw": {"value": raw, "string": printed},
            }
            for number, name, value, threshold, failed, raw, printed in (
                (5, "Reallocated_Sector_Ct", 12, 36, "now", 2_264, "2264"),
                (9, "Power_On_Hours", 58, 0, "", 0x1100000090F6, "37110h+17m"),
                (188, "Command_Timeout", 100, 0, "", 4_295_032_833, "4295032833"),
                (194, "Temperature_Celsius", 117, 0, "", 38, "38 (Min/Max 20/45)"),
                (197, "Current_Pending_Sector", 200, 0, "", 41, "41"),
                (199, "UDMA_CRC_Error_Count", 200, 0, "", 65_535, "65535"),
                (241, "Total_LBAs_Written", 100, 0, "", 204_918_331_904, "204918331904"),
            )
        ],
    },
    "ata_smart_error_log": {"summary": {"revision": 1, "count": 3}},
    "ata_smart_self_test_log": {
        "standard": {
            "table": [
                {
                    "type": {"value": 2, "string": "Extended offline"},
                    "status": {"value": 121, "string": "Completed: read failure", "passed": False},
                    "lifetime_hours": 37_000,
                    "lba": 163_736_384,
                }
            ]
        }
    },
    "ata_device_statistics": {
        "pages": [
            {
                "number": 7,
                "table": [
                    {
                        "name": "Percentage Used Endurance Indicator",
                        "value": 7,
                        "flags": {"valid": True},
                    },
                    {"name": "Power-on Hours", "value": 1, "flags": {"valid": False}},
                ],
            }
        ]
    },
    "ata_sct_status": {"temperature": {"op_limit_max": 60, "limit_max": 70}},
}


def test_a_document_without_any_text_is_read_on_its_own():
    found = understood((), ATA_DOCUMENT, type_="sat", path="/dev/x")
    reading = found.reading
    assert found.support is Support.ON
    assert found.drive is not None
    assert found.drive.identity.wwn == "naa.5fffff0000000099"
    assert (found.drive.capacity_bytes, found.drive.rotation_rpm) == (4_000_787_030_016, 5_900)
    expected = {
        "reallocated-sectors": 2_264,
        "power-on-hours": 37_110,
        "command-timeouts": 1,
        "slow-commands": 1,
        "slower-commands": 1,
        "temperature": 37,
        "lowest-temperature": 20,
        "highest-temperature": 45,
        "pending-sectors": 41,
        "crc-errors": None,
        "data-written": 204_918_331_904 * 512,
        "percentage-used": 7,
        "error-log-entries": 3,
        "self-assessment": "passed",
        "self-test": "Completed: read failure",
    }
    assert {value.signal: value.value for value in reading.values} == expected
    assert [(row.number, row.failing) for row in reading.attributes if row.failing] == [(5, "now")]
    assert reading.self_tests[0].unreadable
    assert reading.self_tests[0].lba == 163_736_384
    assert (reading.warning_celsius, reading.critical_celsius) == (60, 70)


def test_a_recorded_document_without_text_is_read_exactly():
    told = document("nvme_5_issue_46/document.json")
    found = understood(plain_lines(told), told, type_="nvme", path="/dev/x")
    assert found.drive is not None
    assert found.drive.identity.wwn == "eui.001b448b45a3700d"
    assert found.drive.capacity_bytes == 500_107_862_016
    log = told["nvme_smart_health_information_log"]
    assert found.reading.get("data-written") == log["data_units_written"] * 512_000
    assert found.reading.get("unsafe-power-offs") == log["unsafe_shutdowns"]
    assert found.reading.get("temperature") == log["temperature"]


def test_device_statistics_hold_before_the_attribute_table_unless_they_are_to_fill_in_only():
    text = fixture("invented_hdd_failing/all.txt") + STATISTICS_LOG
    table = read(fixture("invented_hdd_failing/all.txt")).reading
    before = read(text).reading
    assert {signal: before.get(signal) for signal in STATISTICS} == STATISTICS
    assert before.warning_celsius == 70
    filling = understood(text.splitlines(), None, type_=None, path="/dev/x", statistics_first=False).reading
    assert filling.get("reallocated-sectors") == table.get("reallocated-sectors") == 2_264
    assert filling.get("hardware-resets") == 736
    assert len(before.values) == len(filling.values) > len(table.values)


@pytest.mark.parametrize(
    ("name", "log"),
    [
        ("invented_hdd_unreadable", STATISTICS_LOG),
        (
            "invented_hdd_unreadable",
            (
                "SCT Status Version:                  3\nSCT Version (vendor specific):       522 (0x020a)\n"
                "Device State:                        Active (0)\n"
                "Current Temperature:                    37 Celsius\n"
                "Power Cycle Min/Max Temperature:     20/40 Celsius\n"
                "Lifetime    Min/Max Temperature:      2/60 Celsius\n"
                "Under/Over Temperature Limit Count:   0/0\n"
            ),
        ),
        (
            "invented_sas_megaraid_failing",
            (
                "Background scan results log\n  Status: scan is active\n"
                "    Accumulated power on time, hours:minutes 41211:27 [2472687 minutes]\n"
                "    Number of background scans performed: 855,  scan progress: 52.92%\n\n"
                "   #  when        lba(hex)    [sk,asc,ascq]    reassign_status\n"
                "   1 100:00  0000000011b74d24  [1,17,1]   Successfully reassigned\n"
            ),
        ),
    ],
)
def test_a_log_behind_the_answer_changes_nothing_of_what_stands_before_it(name: str, log: str):
    alone, both = (read(fixture(f"{name}/all.txt") + more) for more in ("", "\n" + log))
    assert both.drive == alone.drive
    assert both.support is alone.support
    assert (both.reading.attributes, both.reading.self_tests) == (
        alone.reading.attributes,
        alone.reading.self_tests,
    )
    told = {value.signal: value for value in both.reading.values}
    assert all(
        told[value.signal].value == value.value
        for value in alone.reading.values
        if told[value.signal].source == value.source
    )


def test_what_newer_versions_state_of_wear_and_what_cannot_be_true_is_handled():
    told = {
        **ATA_DOCUMENT,
        "ata_device_statistics": {},
        "endurance_used": {"current_percent": 9},
        "spare_available": {"current_percent": 80, "threshold_percent": 10},
        "power_on_time": {"hours": 2_000_000},
    }
    values = {value.signal: value for value in understood((), told, type_=None, path="x").reading.values}
    assert (values["percentage-used"].value, values["available-spare"].value) == (9, 80)
    assert values["spare-threshold"].value == 10
    assert values["power-on-hours"].value is None
    assert values["power-on-hours"].reason


def test_a_scsi_document_is_read_on_its_own():
    told = {
        "device": {"name": "/dev/sdx", "type": "scsi", "protocol": "SCSI"},
        "scsi_vendor": "NORDWALL",
        "scsi_product": "NW10K600",
        "scsi_revision": "N003",
        "logical_unit_id": "0x5fffff0000000041",
        "serial_number": "INVENTED-NW-0041",
        "scsi_transport_protocol": {"name": "SAS (SPL-4)", "value": 6},
        "rotation_rate": 10_000,
        "smart_support": {"available": True, "enabled": True},
        "smart_status": {"passed": False, "scsi": {"asc": 93, "ascq": 0}},
        "temperature": {"current": 39, "drive_trip": 65},
        "power_on_time": {"hours": 41_211, "minutes": 27},
        "scsi_start_stop_cycle_counter": {
            "accumulated_start_stop_cycles": 61,
            "accumulated_load_unload_cycles": 1_822,
        },
        "scsi_grown_defect_list": 873,
        "scsi_error_counter_log": {
            "read": {"gigabytes_processed": "90412.118", "total_uncorrected_errors": 14},
            "write": {"gigabytes_processed": "61777.340", "total_uncorrected_errors": 4_294_967_295},
        },
    }
    found = understood((), told, type_="scsi", path="/dev/x")
    assert {value.signal: value.value for value in found.reading.values} == {
        "temperature": 39,
        "grown-defects": 873,
        "start-stops": 61,
        "load-cycles": 1_822,
        "uncorrected-reads": 14,
        "data-read": 90_412_118_000_000,
        "uncorrected-writes": None,
        "data-written": 61_777_340_000_000,
        "power-on-hours": 41_211,
        "self-assessment": "failed",
    }
    assert found.drive is not None
    assert (found.drive.kind, found.drive.identity.model) == ("sas", "NORDWALL NW10K600")
    assert found.reading.critical_celsius == 65


JSON_VALUES: st.SearchStrategy[Any] = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
    max_leaves=6,
)


@given(st.data())
def test_a_document_with_anything_in_any_place_is_survived(data: st.DataObject):
    told = json.loads(json.dumps(ATA_DOCUMENT))
    for _ in range(data.draw(st.integers(1, 4))):
        spot: Any = told
        while isinstance(spot, (dict, list)) and spot:
            keys = list(spot) if isinstance(spot, dict) else list(range(len(spot)))
            key = data.draw(st.sampled_from(keys))
            if not isinstance(spot[key], (dict, list)) or data.draw(st.booleans()):
                spot[key] = data.draw(JSON_VALUES)
                break
            spot = spot[key]
    reading = understood((), told, type_="sat", path="/dev/x").reading
    for value in reading.values:
        assert not isinstance(value.value, int) or value.value >= 0 or value.unit == "celsius", value
    for row in reading.attributes:
        assert all(part is None or 0 <= part <= 255 for part in (row.value, row.worst, row.threshold))
    for test in reading.self_tests:
        assert all(part is None or part >= 0 for part in (test.hours, test.lba))


WRONG_SHAPE = """{
    "smartctl": {"version": "x", "output": {"a": 1}, "messages": [1, {"string": 5}]},
    "device": [], "smart_status": {"passed": "yes"}, "power_on_time": {"hours": -4},
    "temperature": {"current": 1e9}, "serial_number": 7, "model_name": [1], "user_capacity": {"bytes": -5},
    "wwn": {"naa": -1, "oui": 99999999999999, "id": 3.5}, "rotation_rate": -1, "scsi_grown_defect_list": -3,
    "ata_smart_attributes": {"table": [
        {"id": "5", "raw": []},
        {"id": 5, "name": "Reallocated_Sector_Ct", "value": 1e400, "raw": {"value": -7, "string": 3}}
    ]},
    "nvme_smart_health_information_log": {"critical_warning": -1, "temperature": "hot", "media_errors": 1e30}
}"""


def test_a_document_of_the_wrong_shape_gives_no_impossible_number_and_counts_for_no_reading():
    told = document_of(WRONG_SHAPE)
    assert told is not None
    for type_ in ("sat", "nvme", "scsi"):
        found = understood(plain_lines(told), told, type_=type_, path="/dev/x")
        assert (found.drive, found.says_something, found.genuine) == (None, False, False)
        assert all(value.value is None and value.reason for value in found.reading.values)


def test_an_answer_is_smartctls_where_it_names_itself_and_its_document_is_in_shape():
    text = fixture("invented_hdd_sister/all.txt")
    assert read(text).genuine
    assert not read("AAAA\n").genuine
    told = document("invented_nvme_json/document.json")
    assert understood((), told, type_=None, path="x").genuine
    assert not understood((), {**told, "smart_status": "yes"}, type_=None, path="x").genuine
    assert not understood((), {"temperature": {"current": 30}}, type_=None, path="x").genuine


@pytest.mark.parametrize(
    ("told", "something"),
    [
        ({"power_on_time": {"hours": 7}}, False),
        ({"power_on_time": {"hours": 7}, "temperature": {"current": 30}}, True),
        ({"power_on_time": {"hours": 7}, "serial_number": "INVENTED-7"}, True),
        ({"serial_number": "INVENTED-7"}, False),
        ({"smart_status": {"passed": True}}, True),
        ({}, False),
    ],
)
def test_an_answer_speaks_of_a_drive_by_its_name_its_own_verdict_or_two_values(told: Any, something: bool):
    assert understood((), told, type_="sat", path="/dev/x").says_something is something


def test_a_field_of_an_impossible_size_is_read_at_once():
    told = json.loads(json.dumps(ATA_DOCUMENT))
    told["ata_device_statistics"]["pages"][0]["table"][0]["size"] = 10**12
    assert understood((), told, type_="sat", path="/dev/x").reading.get("percentage-used") == 7


ORIGINALS = [
    *(text_of(path) for path in ANSWERS),
    fixture("invented_hdd_sister/all.txt") + STATISTICS_LOG,
    fixture("invented_sas_megaraid_failing/all.txt") + fixture("sas_hdd_0_issue_51/background.txt"),
]


@settings(max_examples=300)
@given(st.integers(0, len(ORIGINALS) - 1), st.integers(0, 2**32))
def test_a_mutated_answer_is_survived_and_gives_no_number_that_it_does_not_state(which: int, seed: int):
    text = mutated(ORIGINALS[which], random.Random(seed))  # noqa: S311 - dice, no secrets
    witness.check(read(text), text.splitlines())


DOCUMENTS = [text_of(path) for path in sorted(FIXTURES.glob("*/document.json"))]


def check_document(text: str) -> Understood:
    """Read a document, which may be broken, and see that it brings nothing that it does not state."""
    told = document_of(text)
    lines = plain_lines(told) if told is not None else tuple(text.splitlines())
    found = understood(lines, told, type_=None, path="/dev/x")
    witness.check(found, lines, told)
    return found


@settings(max_examples=100)
@given(st.sampled_from(DOCUMENTS), st.integers(0, 2**32))
def test_a_mutated_document_is_survived_and_gives_no_number_that_it_does_not_state(text: str, seed: int):
    check_document(mutated(text, random.Random(seed)))  # noqa: S311 - dice, no secrets


def _caught(many: int) -> bool:
    """Whether the witness finds fault with the reader within so many mutated answers."""
    dice = random.Random(7)  # noqa: S311 - dice, no secrets
    for _ in range(many):
        text = mutated(dice.choice(ORIGINALS), dice)
        try:
            witness.check(read(text), text.splitlines())
        except AssertionError:
            return True
    return False


def test_the_witness_catches_an_unknown_that_became_a_0(monkeypatch: pytest.MonkeyPatch):
    judged = logs._judged
    monkeypatch.setattr(logs, "_judged", lambda meaning, number: (judged(meaning, number)[0] or 0, None))
    assert _caught(300)


def test_the_witness_catches_a_number_that_stands_elsewhere_in_the_text(monkeypatch: pytest.MonkeyPatch):
    judged = logs._judged
    monkeypatch.setattr(
        logs, "_judged", lambda of, number: (16, None) if of.signal == "media-errors" else judged(of, number)
    )
    assert _caught(300)


def test_the_witness_catches_raw_values_that_are_unpacked_in_the_wrong_way(monkeypatch: pytest.MonkeyPatch):
    monkeypatch.setattr(ata, "_value", _low_byte(ata._value))
    assert _caught(300)


def _low_byte(real: Any) -> Any:
    def wrong(meaning: Any, row: Any) -> Any:
        value = real(meaning, row)
        return replace(value, value=value.value & 0xFF) if isinstance(value.value, int) else value

    return wrong


@given(st.text(max_size=300))
def test_any_text_at_all_is_survived(text: str):
    read(text)
