import pytest

from diskwatch.machine.optional import BACKGROUND, STATISTICS, TEMPERATURE, OptionalLogs
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.reading import understood
from diskwatch.records import Drive, Identity, Kind, Place, Reading
from diskwatch.units import DAY
from tests.machine.recordings import FIXTURES, text_of
from tests.machine.test_device_statistics import LOG as STATISTICS_LOG

AT = 1_800_000_000
HDD = text_of(FIXTURES / "invented_hdd_failing" / "all.txt")  # 2,264 sectors reallocated by its attribute table
SAS = text_of(FIXTURES / "invented_sas_megaraid_failing" / "all.txt")
NOT_THERE = "Device Statistics (GP/SMART Log 0x04) not supported\n"
SCT_STATUS = "SCT Status Version:                  3\nSpecified Max Operating Temperature:    60 Celsius\n"
SCAN = (
    "Background scan results log\n"
    "    Accumulated power on time, hours:minutes 41211:27 [2472687 minutes]\n"
    "    Number of background scans performed: 855,  scan progress: 52.92%\n"
    "   1 100:00  0000000011b74d24  [1,17,1]   Require Write or Reassign Blocks command\n"
)
NO_LIMIT = STATISTICS_LOG.replace(" 70  ---", "  -  ---")


class Asking:
    """A drive that is asked pass by pass."""

    def __init__(self, *, has: bool | None = None, kind: Kind = Kind.HDD, instance: str = "1") -> None:
        self.optional = OptionalLogs()
        self.at = AT
        self.found = Found(
            address=Address(node="/dev/sdx", type="sat"),
            blocks=("sdx",),
            place=Place(device="/dev/sdx"),
            drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path="/dev/sdx"), kind=kind),
            instance=instance,
            has_statistics=has,
        )

    def wanted(self) -> set[str]:
        return set(self.optional.wanted(self.found, self.at))

    def read(self, text: str, *, after: int = 1800) -> Reading:
        asked = self.optional.wanted(self.found, self.at)
        lines = tuple(text.splitlines())
        first = self.optional.statistics_first(self.found)
        what = understood(lines, None, type_="sat", path="/dev/sdx", statistics_first=first)
        reading = self.optional.learn(self.found, asked, what, lines, None, at=self.at)
        self.at += after
        return reading


def test_log_04h_is_asked_for_from_the_first_pass_on_where_the_kernel_knows_of_it():
    drive = Asking(has=True)
    assert drive.wanted() == {STATISTICS}
    assert drive.read(HDD + STATISTICS_LOG).get("reallocated-sectors") == 16
    assert STATISTICS in drive.wanted()


def test_without_the_kernels_word_the_drives_own_answer_decides():
    drive = Asking()
    assert drive.wanted() == set()
    drive.read(HDD)
    assert STATISTICS in drive.wanted()
    for text in (
        HDD.replace("General Purpose Logging supported", "No General Purpose Logging support"),
        HDD.replace("ACS-", "ATA8-"),
    ):
        assert text != HDD
        other = Asking()
        other.read(text)
        assert STATISTICS not in other.wanted()


def test_a_counter_keeps_the_source_of_its_first_reading():
    drive = Asking()
    assert drive.read(HDD).get("reallocated-sectors") == 2_264
    second = drive.read(HDD + STATISTICS_LOG)
    assert second.get("reallocated-sectors") == 2_264
    assert second.get("command-resets") == 1_254  # what the table does not have is filled in


def test_where_log_04h_fails_once_its_signals_are_unknown_and_not_taken_from_elsewhere():
    drive = Asking(has=True)
    drive.read(HDD + STATISTICS_LOG)
    silent = {value.signal: value for value in drive.read(HDD).values}
    assert silent["reallocated-sectors"].value is None
    assert silent["reallocated-sectors"].reason
    assert silent["spin-retries"].value is not None
    assert STATISTICS in drive.wanted()
    assert drive.read(HDD + STATISTICS_LOG).get("reallocated-sectors") == 16


def test_a_log_that_the_drive_lacks_is_asked_for_once():
    drive = Asking(has=True)
    assert drive.read(HDD + NOT_THERE).get("reallocated-sectors") == 2_264
    assert STATISTICS not in drive.wanted()
    late = Asking()
    late.read(HDD)
    late.read(HDD)  # asked for this time, and silent
    assert STATISTICS not in late.wanted()


def test_a_drive_that_no_longer_has_log_04h_goes_back_to_its_table():
    drive = Asking(has=True)
    drive.read(HDD + STATISTICS_LOG)
    assert drive.read(HDD + NOT_THERE).get("reallocated-sectors") == 2_264
    assert STATISTICS not in drive.wanted()
    assert drive.read(HDD).get("reallocated-sectors") == 2_264


@pytest.mark.parametrize("answer", ["", "Read GP Log Directory failed\n" + NOT_THERE])
def test_a_foretold_log_that_is_silent_at_first_does_not_hand_the_counters_to_the_table_at_once(answer: str):
    drive, patient = Asking(has=True), Asking(has=True)
    for _ in range(2):
        assert drive.read(HDD + answer).get("reallocated-sectors") is None
        assert STATISTICS in drive.wanted()
    assert drive.read(HDD + answer).get("reallocated-sectors") == 2_264
    assert STATISTICS not in drive.wanted()
    patient.read(HDD + answer)
    assert patient.read(HDD + STATISTICS_LOG).get("reallocated-sectors") == 16
    assert patient.read(HDD).get("reallocated-sectors") is None


def test_another_device_is_learnt_anew():
    drive = Asking(has=True)
    drive.read(HDD + NOT_THERE)
    assert drive.wanted() == {TEMPERATURE}
    again = Asking(has=True, instance="2")
    again.optional = drive.optional
    assert again.wanted() == {STATISTICS}


def test_sct_status_is_asked_for_at_most_once_a_day_and_its_limit_holds_meanwhile():
    drive = Asking(has=False)
    assert drive.read(HDD).warning_celsius is None
    assert TEMPERATURE in drive.wanted()
    assert drive.read(HDD + SCT_STATUS).warning_celsius == 60
    assert TEMPERATURE not in drive.wanted()
    assert drive.read(HDD, after=DAY).warning_celsius == 60
    assert TEMPERATURE in drive.wanted()


def test_sct_status_is_not_asked_for_where_log_04h_states_the_limit():
    stated, silent = Asking(has=True), Asking(has=True)
    assert stated.read(HDD + STATISTICS_LOG).warning_celsius == 70
    silent.read(HDD + NO_LIMIT)
    assert (TEMPERATURE in stated.wanted(), TEMPERATURE in silent.wanted()) == (False, True)


def test_sct_status_is_never_asked_of_the_family_that_it_can_freeze():
    model = next(line for line in HDD.splitlines() if line.startswith("Device Model"))
    drive = Asking(has=False)
    drive.read(HDD.replace(model, "Device Model:     TOSHIBA DT01ACA300"))
    assert drive.wanted() == set()


def test_nothing_more_is_asked_through_a_usb_adapter():
    drive = Asking(has=True, kind=Kind.USB)
    drive.read(HDD)
    assert drive.wanted() == set()


def test_the_background_scan_of_a_scsi_drive_is_asked_for_where_its_answer_shows_it():
    shown = SAS.replace("hours:minutes 41211:27", "hours:minutes 41211:27 [2472687 minutes]")
    assert shown != SAS
    for text, wanted in ((SAS, set()), (shown, {BACKGROUND})):
        drive = Asking(kind=Kind.SAS)
        drive.read(text)
        assert drive.wanted() == wanted
    assert drive.read(shown + SCAN).get("pending-sectors") == 1
    assert drive.wanted() == {BACKGROUND}
    lacking = Asking(kind=Kind.SAS)
    lacking.read(shown)
    lacking.read(shown + "Device does not support Background scan results logging\n")
    assert lacking.wanted() == set()


def test_an_nvme_drive_is_asked_for_no_more():
    drive = Asking(kind=Kind.NVME)
    drive.read(text_of(FIXTURES / "invented_nvme_hot" / "all.txt"))
    assert drive.wanted() == set()
