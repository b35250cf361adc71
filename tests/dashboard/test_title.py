from hypothesis import given, strategies as st

from diskwatch.dashboard.title import title
from diskwatch.dashboard.weight import Face
from tests.dashboard.drives import COPY
from tests.dashboard.strategies import DRIVE_LINES, unhurried


def test_the_page_and_the_drive_are_named_with_its_call():
    row = title("Copy plan", COPY, 100, Face())
    assert row.plain == "▓  copy  Copy plan: INVENTED RX-4000, serial INV0002, sdc"


def test_a_drive_that_is_gone_is_said_to_be_gone():
    assert "not among those" in title("Ticket", None, 100, Face()).plain


@unhurried
@given(DRIVE_LINES, st.integers(1, 120))
def test_the_line_is_never_wider_than_the_screen(line, width):
    assert title("Ticket", line, width, Face()).cell_len <= width
