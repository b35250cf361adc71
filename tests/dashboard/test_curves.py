from dataclasses import replace

import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.curves import curve_head, curve_rows, small_line
from diskwatch.dashboard.weight import Face
from diskwatch.units import DAY
from tests.dashboard.answers import TOLD, WARM, WORN
from tests.dashboard.drives import NOW
from tests.dashboard.strategies import unhurried

SINCE = NOW - 30 * DAY


def rows(width: int, face: Face | None = None, chosen: int = 0) -> list[str]:
    made = curve_rows((WORN, WARM, TOLD), chosen, since=SINCE, now=NOW, width=width, face=face or Face())
    return [row.plain for row in made]


def test_a_row_tells_name_value_and_what_became_of_it():
    worn, warm, told = rows(120)
    assert worn.startswith(" > Percentage used")
    assert "71 %" in worn
    assert "up 10" in worn
    assert "41 °C" in warm
    assert "usual 35 to 41 °C" in warm
    assert "once in 2 years" in warm
    assert "passed" in told


@unhurried
@given(st.integers(20, 200))
def test_every_column_has_its_head_above_it_and_none_is_wider_than_the_page(width):
    head = curve_head("Signals, the last month", width, Face()).plain
    assert len(head) <= width
    if width >= 60:
        assert head.index("now") == rows(width)[0].index("71 %")


def test_the_small_line_rises_with_the_values_and_is_open_where_nothing_was_read():
    line = small_line(WORN, SINCE, NOW, 30, Face())
    assert line[0] == "▁"
    assert line[-1] == "█"
    assert line[19:21] == "  "


def test_a_signal_that_never_moved_is_flat():
    still = replace(WORN, points=((SINCE, 5.0),), gaps=())
    assert set(small_line(still, SINCE, NOW, 10, Face())) == {"▁"}


@pytest.mark.parametrize("width", [60, 80, 120, 200])
def test_where_letters_end_at_ascii_the_small_lines_do_too(width):
    made = curve_rows((WORN,), 0, since=SINCE, now=NOW, width=width, face=Face(ascii_only=True))
    assert made[0].plain.isascii()


@unhurried
@given(st.integers(20, 200), st.integers(0, 2))
def test_no_row_is_wider_than_the_page(width, chosen):
    made = curve_rows((WORN, WARM, TOLD), chosen, since=SINCE, now=NOW, width=width, face=Face())
    assert all(row.cell_len <= width for row in made)
