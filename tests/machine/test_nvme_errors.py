import pytest

from diskwatch.machine.nvme_errors import media_entries
from diskwatch.machine.text import Sheet
from tests.machine.recordings import FIXTURES, text_of

HEAD = (
    "Error Information (NVMe Log 0x01, 16 of 64 entries)",
    "Num   ErrCount  SQId   CmdId  Status  PELoc          LBA  NSID    VS",
)
REFUSED = "  0       1356     0  0x0012  0xc005  0x028            -     0     -"
MEDIUM = "  1       1355     3  0x01a2  0x8503  0x000    163736384     1     -"
"""Unrecovered read error: code type 2h, code 81h, shifted left by one for the phase tag (invented row)."""


def count(*lines: str) -> int | str | None:
    value = media_entries(None, Sheet.of(lines))
    return None if value is None else value.value


@pytest.mark.parametrize("words", ["", "  Unrecovered Read Error"])
def test_only_entries_about_the_medium_count_with_words_behind_them_or_without(words):
    assert count(*HEAD, REFUSED + words) == 0
    assert count(*HEAD, REFUSED + words, MEDIUM + words, MEDIUM + words) == 2


def test_an_empty_log_counts_none_and_a_log_that_is_not_shown_is_not_known():
    assert count(HEAD[0], "No Errors Logged") == 0
    assert count("SMART overall-health self-assessment test result: PASSED") is None
    assert count("No Errors Logged") is None


def test_rows_of_another_table_do_not_count():
    assert count(*HEAD, REFUSED, "", MEDIUM) == 0
    assert count(MEDIUM) is None


@pytest.mark.parametrize(
    "row", [MEDIUM.replace("0x8503", "0x85o3"), MEDIUM.replace("0x8503", "-"), MEDIUM[:20], "garbage"]
)
def test_an_entry_that_cannot_be_read_makes_the_number_unknown_and_not_0(row):
    value = media_entries(None, Sheet.of([*HEAD, REFUSED, row]))
    assert value is not None
    assert value.value is None
    assert value.reason
    told = media_entries({"nvme_error_information_log": {"read": 16, "table": [{"lba": 4}]}}, Sheet.of([]))
    assert told is not None
    assert told.value is None


def test_a_note_of_entries_that_are_not_shown_is_no_entry():
    assert count(*HEAD, MEDIUM, "... (8 entries not read)") == 1


def test_an_entry_whose_count_is_0_is_no_entry():
    assert count(*HEAD, REFUSED, MEDIUM.replace("1355", "   0")) == 0


@pytest.mark.parametrize("name", ["nvme_0", "nvme_6", "nvme_11_issue_75", "nvme_4_issue_53"])
def test_recorded_entries_of_refused_commands_are_none_of_the_medium(name):
    assert count(*text_of(FIXTURES / name / "all.txt").splitlines()) == 0


def test_the_document_is_read_too():
    table = [{"status_field": {"value": 0x4281, "status_code_type": 2}}, {"status_field": {"value": 0x6002}}]
    value = media_entries(
        {"nvme_error_information_log": {"size": 64, "read": 16, "table": table}}, Sheet.of([])
    )
    assert value is not None
    assert value.value == 1
    empty = media_entries({"nvme_error_information_log": {"size": 64, "read": 16}}, Sheet.of([]))
    assert empty is not None
    assert empty.value == 0
