from dataclasses import replace
from datetime import UTC

import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.chart.plot import Frame, plot
from diskwatch.dashboard.questions import Ahead, Curve
from diskwatch.dashboard.weight import Face
from diskwatch.units import DAY
from tests.dashboard.answers import TOLD, WARM, WORN
from tests.dashboard.drives import NOW
from tests.dashboard.strategies import unhurried


def frame(width: int = 80, rows: int = 6, face: Face | None = None) -> Frame:
    return Frame(since=NOW - 30 * DAY, now=NOW, width=width, rows=rows, face=face or Face(), zone=UTC)


def rows(curve: Curve, **more) -> list[str]:
    return [row.plain for row in plot(curve, frame(**more))]


def test_the_picture_has_a_heading_a_plane_an_axis_and_dates():
    told = rows(WORN)
    assert told[0].startswith(" Percentage used: 71 %")
    assert told[0].endswith("limit 100 in 60 days to 3 months")
    assert len(told) == 1 + 6 + 2
    assert "now" in told[-1]
    assert "Nov" in told[-1]


def test_what_is_to_be_expected_stands_right_of_now_between_here_and_the_limit():
    plane = rows(WORN)[1:7]
    bars = [row.rindex("│") for row in plane]
    assert len(set(bars)) == 1
    assert all("░" not in row[: bars[0]] for row in plane)
    assert any("░" in row[bars[0] :] for row in plane)
    assert "─" in plane[0][10 : bars[0]]


def test_where_nothing_was_read_the_plane_is_empty_and_the_axis_broken():
    plane, axis = rows(WORN)[1:7], rows(WORN)[7]
    now = axis.index("│")
    silent = [column for column in range(8, now) if axis[column] == " "]
    assert silent
    dots = {column for row in plane for column in silent if 0x2800 < ord(row[column]) < 0x2900}
    # The fitted line goes on through a gap, in dots far apart.
    assert len(dots) <= len(silent) // 3 + 1


def test_the_usual_range_is_marked_for_what_goes_up_and_down():
    plane = rows(WARM)[1:7]
    assert sum("·" in row for row in plane) >= 1


def test_a_signal_told_in_words_has_no_picture_and_one_without_values_says_so():
    assert "told in words" in rows(TOLD)[1]
    assert "Nothing was read of it within this span." in rows(replace(WORN, points=()))[1]


@pytest.mark.parametrize("face", [Face(ascii_only=True), Face(braille=False)])
def test_terminals_with_fewer_letters_get_fewer(face):
    told = "".join(rows(WORN, face=face))
    if face.ascii_only:
        assert told.isascii()
    assert not any(0x2800 <= ord(letter) < 0x2900 for letter in told)


def test_without_colours_none_is_used():
    for row in plot(WORN, frame(face=Face(colours=False))):
        assert all("#" not in str(span.style) for span in row.spans)


@unhurried
@given(
    st.lists(st.tuples(st.integers(0, 40 * DAY), st.floats(0, 1e15)), max_size=40),
    st.none()
    | st.builds(Ahead, limit=st.floats(0, 1e6), low=st.floats(0, 9_999), high=st.none() | st.floats(0, 9_999)),
    st.integers(1, 250),
    st.integers(1, 30),
    st.booleans(),
)
def test_every_picture_keeps_within_its_columns_and_rows(points, ahead, width, height, held):
    curve = replace(
        WORN,
        points=tuple(sorted((NOW - ago, value) for ago, value in points)),
        ahead=ahead,
        held=held,
        fit=None,
    )
    drawn = plot(curve, frame(width=width, rows=height))
    assert all(row.cell_len <= width for row in drawn)
    assert len(drawn) <= height + 3
