"""The layout is that of smartctl 7.3; the blocks are invented."""

import pytest

from diskwatch.machine.background_scan import hinted, lacking, pending, told
from diskwatch.machine.text import Sheet
from tests.machine.recordings import FIXTURES, text_of

WAITS = "Require Write or Reassign Blocks command"
DONE = "Successfully reassigned"


def sheet(*rows: str) -> Sheet:
    return Sheet.of(
        [
            "Background scan results log",
            "  Status: scan is active",
            "    Accumulated power on time, hours:minutes 60752:36 [3645156 minutes]",
            "    Number of background scans performed: 855,  scan progress: 52.92%",
            "    Number of background medium scans performed: 855",
            "",
            "   #  when        lba(hex)    [sk,asc,ascq]    reassign_status",
            *rows,
        ]
    )


def row(number: int, when: str, lba: str, status: str) -> str:
    return f"{number:4} {when}  {lba}  [1,17,1]   {status}"


def count(*rows: str) -> int | str | None:
    value = pending(None, sheet(*rows))
    assert value is not None
    return value.value


def test_blocks_that_wait_for_a_write_are_pending_and_replaced_ones_are_not():
    assert count() == 0
    assert (
        count(
            row(1, "100:00", "0000000011b74d24", WAITS),
            row(2, "101:00", "0000000011b74d25", WAITS),
            row(3, "102:00", "0000000011b74d26", DONE),
            row(4, "103:00", "0000000011b74d27", "Recovered via rewrite in-place"),
        )
        == 2
    )


@pytest.mark.parametrize(("first", "second", "left"), [(WAITS, DONE, 0), (DONE, WAITS, 1), (WAITS, WAITS, 1)])
def test_what_was_found_later_about_a_block_holds(first, second, left):
    rows = [row(7, "100:00", "0000000011b74d24", first), row(2, "100:59", "0000000011B74D24", second)]
    assert count(*rows) == count(*reversed(rows)) == left


@pytest.mark.parametrize(
    "broken",
    [
        row(1, "100:00", "0000000011b74d24", "Requ?re Write or Reassign Blocks command"),
        row(1, "100:00", "00000000x1b74d24", WAITS),
        row(1, "1o0:00", "0000000011b74d24", WAITS),
        row(1, "100:00", "0000000011b74d24", WAITS)[:40],
        ">>>> log truncated, fetched 1000 of 2000 available bytes",
    ],
)
def test_a_result_that_cannot_be_read_makes_the_number_unknown_and_not_0(broken: str):
    value = pending(None, sheet(broken, row(2, "102:00", "0000000011b74d26", DONE), "", "Another log"))
    assert value is not None
    assert value.value is None
    assert value.reason


def test_a_result_in_the_document_that_lacks_a_part_makes_the_number_unknown():
    scan = {"result_1": {"lba": 5, "reassign_status": WAITS}}
    value = pending({"scsi_background_scan": scan}, Sheet.of([]))
    assert value is not None
    assert value.value is None


def test_entries_of_the_makers_own_are_no_results():
    assert count(row(33024, "21708:31", "0008012701180900", WAITS)) == 0


def test_a_drive_without_the_log_or_not_asked_for_it_is_not_known():
    lines = ["Device does not support Background scan results logging"]
    assert lacking(Sheet.of(lines))
    assert pending(None, Sheet.of(lines)) is None
    assert pending(None, Sheet.of(["SMART Health Status: OK"])) is None
    assert not told(None, Sheet.of(["Background scan results log"]))  # cut off


def test_recorded_answers_are_told_apart():
    has, lacks = (
        Sheet.of(text_of(FIXTURES / name / "background.txt").splitlines())
        for name in ("sas_hdd_0_issue_51", "megaraid_jbod_sas_hdd_0_issue_85")
    )
    assert told(None, has)
    assert lacking(lacks)
    assert not told(None, lacks)


def test_powered_minutes_in_an_answer_without_the_log_show_that_the_drive_keeps_it():
    assert hinted(Sheet.of(["    Accumulated power on time, hours:minutes 146:02 [8762 minutes]"]))
    assert not hinted(Sheet.of(["Accumulated power on time, hours:minutes 41211:27"]))


def test_the_document_is_read_too():
    scan = {
        "status": {"number_scans_performed": 9},
        "result_1": {
            "lba": {"value": 5},
            "accumulated_power_on": {"hours": 9, "minutes": 7},
            "reassign_status": WAITS,
        },
        "result_2": {"lba": 6, "accumulated_power_on": {"hours": 1, "minutes": 8}, "reassign_status": DONE},
        "result_3": {"lba": 5, "accumulated_power_on": {"hours": 8, "minutes": 59}, "reassign_status": DONE},
    }
    value = pending({"scsi_background_scan": scan}, Sheet.of([]))
    assert value is not None
    assert value.value == 1
