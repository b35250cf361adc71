import pytest

from diskwatch.machine.held import Family, device_of
from diskwatch.machine.logs import nvme_limits, nvme_values, scsi_values, trip_celsius
from diskwatch.machine.text import Sheet
from diskwatch.records import Value
from tests.machine.recordings import SHARED, text_of, truth_of

SHELF = SHARED / "sas_error_counters.txt"


def nvme(*lines: str) -> dict[str, Value]:
    return {value.signal: value for value in nvme_values(None, Sheet.of(lines))}


def scsi(*lines: str, library: bool = False) -> dict[str, Value]:
    device = device_of(lines, Family.SCSI) if library else None
    return {value.signal: value for value in scsi_values(None, device, Sheet.of(lines))}


def test_data_units_are_512000_bytes_each_and_exact_at_any_size():
    assert nvme("Data Units Written: 24,664,736 [12.6 TB]")["data-written"].value == 12_628_344_832_000
    largest = 2**128 - 2
    assert nvme(f"Data Units Written: {largest:,} [x]")["data-written"].value == largest * 512_000


def test_a_counter_at_its_end_or_a_volume_of_zero_is_not_known():
    for line in (f"Media and Data Integrity Errors: {2**128 - 1}", "Data Units Read: 0"):
        (found,) = nvme(line).values()
        assert found.value is None
        assert found.reason


def test_a_counter_of_errors_at_zero_is_known_to_be_zero():
    assert nvme("Media and Data Integrity Errors:    0")["media-errors"].value == 0


def test_the_time_above_the_warning_limit_is_found_though_its_label_has_two_blanks():
    assert nvme("Warning  Comp. Temperature Time:    284")["warning-temperature-minutes"].value == 284


def test_the_critical_warning_is_a_number_of_bits():
    assert nvme("Critical Warning:  0x0c")["critical-warning"].value == 12


def test_a_field_that_holds_no_number_is_not_known():
    found = nvme("Percentage Used:   1x%")["percentage-used"]
    assert found.value is None
    assert found.reason


def test_temperatures_below_zero_are_read_and_impossible_ones_are_not_known():
    assert nvme("Temperature: -5 Celsius")["temperature"].value == -5
    assert nvme("Temperature: 999 Celsius")["temperature"].value is None


def test_a_drives_own_limits_are_taken_and_zero_stands_for_none():
    told = Sheet.of(
        ["Warning  Comp. Temp. Threshold:     84 Celsius", "Critical Comp. Temp. Threshold:     0 Celsius"]
    )
    assert nvme_limits(None, told) == (84, None)
    document = {"nvme_composite_temperature_threshold": {"warning": 70, "critical": 80}}
    assert nvme_limits(document, told) == (70, 80)
    assert trip_celsius(None, Sheet.of(["Drive Trip Temperature:        65 C"])) == 65
    assert trip_celsius({"temperature": {"drive_trip": 60}}, Sheet.of([])) == 60
    assert trip_celsius({"scsi_temperature": {"drive_trip": 60}}, Sheet.of([])) == 60
    assert trip_celsius(None, Sheet.of(["Drive Trip Temperature:        0 C"])) is None
    assert trip_celsius(None, Sheet.of(["Drive Trip Temperature:        <not available>"])) is None


READ = "read:   51208117     1904         0  51210021   51210035      90412.118          14"


@pytest.mark.parametrize("library", [False, True])
def test_uncorrected_errors_and_volumes_come_from_the_error_rows(library: bool):
    found = scsi("Error counter log:", READ, "write: 0 0 0 0 67506 3887,270 2", library=library)
    assert (found["uncorrected-reads"].value, found["uncorrected-writes"].value) == (14, 2)
    assert found["data-read"].value == 90_412_118_000_000
    assert found["data-written"].value == 3_887_270_000_000


@pytest.mark.parametrize("library", [False, True])
@pytest.mark.parametrize(
    "line",
    [
        READ.replace("90412.118 ", "90412.118 2 "),
        READ + " 7",
        READ.removesuffix("14"),
        READ.replace("1904", ""),
        READ + "x",
    ],
)
def test_a_row_with_a_column_too_many_or_too_few_gives_no_number(line: str, library: bool):
    found = scsi("Error counter log:", line, "write: 0 0 0 0 67506 3887.270 2", library=library)
    assert (found["uncorrected-reads"].value, found["uncorrected-writes"].value) == (None, 2)
    assert found["uncorrected-reads"].reason
    assert "data-read" not in found


def test_every_sensor_of_an_nvme_drive_is_read_from_document_or_text():
    found = nvme(
        "Temperature Sensor 1:  41 Celsius", "Temperature Sensor 8:  -3 Celsius", "Temperature Sensor 9: 5 C"
    )
    assert {signal: value.value for signal, value in found.items()} == {
        "temperature-sensor-1": 41,
        "temperature-sensor-8": -3,
    }
    log = {"nvme_smart_health_information_log": {"temperature_sensors": [40, None, True, 900]}}
    told = {value.signal: value for value in nvme_values(log, Sheet.of(["Temperature Sensor 2:  x"]))}
    assert {signal: value.value for signal, value in told.items()} == {
        "temperature-sensor-1": 40,
        "temperature-sensor-2": None,
        "temperature-sensor-4": None,
    }
    assert told["temperature-sensor-2"].reason
    assert told["temperature-sensor-4"].reason


def test_how_often_and_how_long_an_nvme_drive_slowed_down_for_heat_is_read():
    found = nvme("Thermal Temp. 1 Transition Count:   7", "Thermal Temp. 1 Total Time:         56184")
    assert (found["light-throttlings"].value, found["light-throttling-seconds"].value) == (7, 56_184)
    assert found["light-throttling-seconds"].unit == "seconds"
    log = {"nvme_smart_health_information_log": {"thermal_temp_2_total_time": 9}}
    (heavy,) = nvme_values(log, Sheet.of([]))
    assert (heavy.signal, heavy.value) == ("heavy-throttling-seconds", 9)


def test_an_error_counter_at_its_end_is_not_known():
    found = scsi(READ.replace("          14", "  4294967295"))["uncorrected-reads"]
    assert found.value is None
    assert found.reason


def test_non_medium_errors_are_found_under_their_capital_letter():
    assert scsi("Non-medium error count:    84893")["non-medium-errors"].value == 84_893


@pytest.mark.skipif(not SHELF.is_file(), reason="the shared recordings are not here")
@pytest.mark.parametrize("library", [False, True])
def test_every_disk_of_a_recorded_shelf_gives_the_counts_that_its_text_states(library: bool):
    disks = text_of(SHELF).split("==================== /dev/")[1:]
    assert len(disks) == 24
    for disk in disks:
        truth, found = truth_of(disk).signals, scsi(*disk.splitlines(), library=library)
        assert truth
        assert {signal: found[signal].value for signal in truth} == truth


@pytest.mark.parametrize(
    "line",
    [
        "  number of hours powered up = 8347.20",
        "    Accumulated power on time, hours:minutes 8347:12 [500832 minutes]",
        "Accumulated power on time, hours:minutes 8347:12",
    ],
)
def test_powered_hours_are_found_on_either_page(line: str):
    assert scsi(line)["power-on-hours"].value == 8_347


def test_a_controllers_zero_temperature_is_not_known_but_a_drives_is():
    made_up = scsi("Current Drive Temperature:     0 C", "Drive Trip Temperature:        0 C")["temperature"]
    assert made_up.value is None
    assert made_up.reason
    assert (
        scsi("Current Drive Temperature:     0 C", "Drive Trip Temperature:        65 C")["temperature"].value
        == 0
    )
    assert scsi("Current temperature = 25")["temperature"].value == 25


def test_pending_defects_are_counted_where_the_drive_lists_them():
    assert scsi("  Pending defect count:0 Pending Defects")["pending-sectors"].value == 0
    one = scsi("  Pending defect count:1 Pending Defect, LBA and accumulated_power_on_hours follow")
    assert one["pending-sectors"].value == 1
    many = scsi("  Pending defect count:12 Pending Defects: index, LBA and accumulated_power_on_hours follow")
    assert many["pending-sectors"].value == 12
    assert scsi("  Pending defect count:3 Pending Defects")["pending-sectors"].value == 3
