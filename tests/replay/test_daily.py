import pytest

from diskwatch.records import Kind
from diskwatch.replay.cells import BadRow
from diskwatch.replay.columns import layout_of
from diskwatch.replay.daily import Daily
from diskwatch.units import DAY


def daily(header):
    layout = layout_of(header.split(","))
    assert layout is not None
    return Daily(layout)


def test_a_row_is_a_pass_at_the_first_second_of_its_day():
    row = daily("day,serial,model,a5_raw,failed").row(["1970-01-03", "INV1", "m", "8", "1"], "INV1")
    assert (row.pass_.at, row.failed) == (2 * DAY, True)
    assert row.pass_.reading is not None
    assert row.pass_.reading.get("reallocated-sectors") == 8


def test_a_drive_that_counts_percent_of_its_endurance_is_no_hard_drive():
    row = daily("day,serial,percentage_used").row(["3", "INV1", "4"], "INV1")
    assert row.pass_.drive is not None
    assert row.pass_.drive.kind is Kind.NVME


def test_a_word_that_is_no_flag_is_named():
    with pytest.raises(BadRow, match="perhaps"):
        daily("day,serial,failed").row(["3", "INV1", "perhaps"], "INV1")
