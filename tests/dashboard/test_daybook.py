from datetime import UTC

from hypothesis import given, strategies as st

from diskwatch.dashboard.daybook import entry_lines
from diskwatch.records import Entry
from tests.dashboard.answers import ENTRIES
from tests.dashboard.strategies import unhurried


def test_a_day_has_its_date_once_and_every_entry_its_hour_kind_and_drive():
    rows = [row.plain for row in entry_lines(ENTRIES[:2], {2: "Photos"}, 80, UTC)]
    assert rows == [
        " Saturday 28 November 2026",
        "   15:00  rise        Photos: Pending sectors rose from 0 to 24.",
        "",
        " Sunday 29 November 2026",
        "   15:00  call        Photos: The call became copy.",
    ]


def test_what_changes_a_call_has_more_weight():
    (_, row) = entry_lines(ENTRIES[1:2], {}, 80, UTC)
    assert any("bold" in str(span.style) for span in row.spans)


@unhurried
@given(st.text(max_size=120), st.text(max_size=20), st.integers(30, 160))
def test_no_row_is_wider_than_the_page(text, kind, width):
    entry = Entry(at=1_780_300_000, drive=1, kind=kind[:10], text=text)
    assert all(row.cell_len <= width for row in entry_lines((entry,), {1: "A"}, width, UTC))
