import pytest

from diskwatch.machine.held import Family, device_of
from diskwatch.machine.selftests import newest_result, self_tests
from diskwatch.machine.text import Sheet
from diskwatch.records import SelfTest

ATA = """Vendor Specific SMART Attributes with Thresholds:

SMART Self-test log structure revision number 1
Num  Test_Description    Status                  Remaining  LifeTime(hours)  LBA_of_first_error
# 1  Extended offline    Self-test routine in progress 30%       252         -
# 2  Short offline       Aborted by host               10%       250         -
# 3  Extended offline    Completed: read failure       90%       248         163736384
# 4  Short offline       Completed: servo/seek failure 90%       240         -
#10  Short offline       Completed without error       00%       238         -

SMART Selective self-test log data structure revision number 1
 SPAN  MIN_LBA  MAX_LBA  CURRENT_TEST_STATUS
    1        0        0  Not_testing
"""
SCSI = """Transport protocol:   SAS (SPL-4)

SMART Self-test log
Num  Test              Status                 segment  LifeTime  LBA_first_err [SK ASC ASQ]
     Description                              number   (hours)
# 1  Background long   Failed in segment -->       7   41002        1153204012 [0x4 0x11 0x0]
# 2  Background long   Failed in segment -->       -   41001                 - [0x3 0x11 0x0]
# 3  Background short  Completed                   -   40990                 - [-   -    -]
# 4  Background short  Aborted (by user command)   -   40989                 - [-   -    -]
"""
NVME = """NVMe Version: 1.4
Supported Power States
St Op     Max   Active     Idle   RL RT WL WT  Ent_Lat  Ex_Lat
 0 +     3.50W       -        -    0  0  0  0        5       5

Self-test Log (NVMe Log 0x06{more})
Self-test status: Extended self-test in progress (28% completed)
Num  Test_Description  Status                       Power_on_Hours  Failing_LBA  NSID Seg SCT Code
 0   Extended          Completed: failed segments             3441         8812     1   2   2 0x81
 1   Short             Aborted: Self-test command             3440            -     -   -   -    -
 2   Short             Completed without error                 340            -     -   -   -    -
"""


def log_of(text: str, family: Family, *, library: bool) -> tuple[SelfTest, ...]:
    lines = text.splitlines()
    return self_tests(family, None, device_of(lines, family) if library else None, Sheet.of(lines))


@pytest.mark.parametrize("library", [False, True])
def test_an_ata_log_is_read_with_and_without_the_library(library: bool):
    running, aborted, unread, stuck, sound = log_of(ATA, Family.ATA, library=library)
    assert (running.passed, aborted.passed, unread.passed, stuck.passed, sound.passed) == (
        None,
        None,
        False,
        False,
        True,
    )
    assert unread == SelfTest(
        name="Extended offline",
        result="Completed: read failure",
        extended=True,
        passed=False,
        unreadable=True,
        hours=248,
        lba=163_736_384,
    )
    assert not stuck.unreadable
    assert (sound.hours, sound.extended) == (238, False)


@pytest.mark.parametrize("library", [False, True])
def test_a_scsi_test_met_an_unreadable_sector_where_it_names_one_or_says_medium_error(library: bool):
    named, medium, sound, aborted = log_of(SCSI, Family.SCSI, library=library)
    assert (named.unreadable, named.lba, named.hours) == (True, 1_153_204_012, 41_002)
    assert (medium.unreadable, medium.lba) == (True, None)
    assert (sound.passed, aborted.passed) == (True, None)
    assert named.extended


@pytest.mark.parametrize("library", [False, True])
def test_the_arrow_that_points_at_the_next_column_is_no_part_of_a_result(library: bool):
    named, medium, sound, aborted = log_of(SCSI, Family.SCSI, library=library)
    assert (named.result, medium.result) == ("Failed in segment", "Failed in segment")
    assert (sound.result, aborted.result) == ("Completed", "Aborted (by user command)")
    assert newest_result((named, sound)) == "Failed in segment"


@pytest.mark.parametrize(
    ("told", "result"),
    [
        ("Failed in segment --> 7 -", "Failed in segment"),
        ("Failed in segment->", "Failed in segment"),
        ("Completed: servo/seek failure", "Completed: servo/seek failure"),
        ("Self-test - odd", "Self-test - odd"),
        ("-->", "-->"),
    ],
)
def test_a_result_stays_the_drives_own_word_up_to_an_arrow(told: str, result: str):
    row = {"self_test_code": {"string": "Short"}, "self_test_result": {"string": told}}
    (found,) = self_tests(Family.NVME, {"nvme_self_test_log": {"table": [row]}}, None, Sheet.of([]))
    assert found.result == result


@pytest.mark.parametrize("more", ["", ", NSID 0xffffffff"])
@pytest.mark.parametrize("library", [False, True])
def test_an_nvme_log_is_read_under_either_headline_and_no_other_table_is(more: str, library: bool):
    failed, aborted, sound = log_of(NVME.format(more=more), Family.NVME, library=library)
    assert (failed.unreadable, failed.lba, failed.hours) == (True, 8_812, 3_441)
    assert (aborted.passed, sound.passed) == (None, True)


@pytest.mark.parametrize("codes", ["2 0x81", "0x2 0x81", " 0x2  0x81", "-    -", "-    0x81"])
def test_the_newest_failed_nvme_test_is_neither_lost_nor_falsified_by_how_its_codes_are_printed(codes: str):
    sheet = Sheet.of(NVME.format(more="").replace("2 0x81", codes).splitlines())
    newest = self_tests(Family.NVME, None, device_of(sheet.lines, Family.NVME), sheet)[0]
    assert (newest.result, newest.hours, newest.lba) == ("Completed: failed segments", 3_441, 8_812)
    assert (newest.passed, newest.unreadable) == (False, True)


def test_the_library_is_taken_where_it_understands_more_rows():
    sheet = Sheet.of(ATA.splitlines())
    device = device_of(sheet.lines, Family.ATA)
    assert len(self_tests(Family.ATA, None, device, Sheet.of(()))) == 5
    assert device is not None
    device.tests[0].status = "8754"  # as the library sets out a row that it cuts at the wrong places
    assert len(self_tests(Family.ATA, None, device, Sheet.of(()))) == 4


def test_a_test_that_a_fatal_or_unknown_error_ended_has_failed():
    for line in ("Fatal or unknown error       ", "Fatal or unknown test error  "):
        sheet = Sheet.of(ATA.replace("Completed: read failure      ", line).splitlines())
        tests = self_tests(Family.ATA, None, None, sheet)
        assert [test.passed for test in tests] == [None, None, False, False, True]
    told = {
        "type": {"string": "Extended offline"},
        "status": {"string": "Fatal or unknown error", "passed": False},
    }
    (test,) = self_tests(
        Family.ATA, {"ata_smart_self_test_log": {"standard": {"table": [told]}}}, None, Sheet.of(())
    )
    assert test.passed is False


def test_the_document_comes_before_the_text():
    document = {
        "nvme_self_test_log": {
            "table": [
                {
                    "self_test_code": {"value": 1, "string": "Short"},
                    "self_test_result": {"value": 0, "string": "Completed without error"},
                    "power_on_hours": 77,
                }
            ]
        }
    }
    (found,) = self_tests(Family.NVME, document, None, Sheet.of(NVME.format(more="").splitlines()))
    assert (found.hours, found.passed) == (77, True)


def test_the_newest_result_is_that_of_the_newest_test_that_is_over():
    assert newest_result(log_of(ATA, Family.ATA, library=False)) == "Aborted by host"
    assert newest_result(()) is None


def test_words_that_are_not_known_are_neither_passed_nor_failed():
    text = ATA.replace("Completed: read failure  ", "Completed sideways        ")
    assert [found.passed for found in log_of(text, Family.ATA, library=False)][2] is None
