from dataclasses import replace

import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.chart.strip import strip
from diskwatch.dashboard.questions import Strand
from diskwatch.dashboard.weight import Face
from diskwatch.records import Margin
from diskwatch.units import DAY
from tests.dashboard.drives import COPY, KEEP, NOW

TODAY = NOW // DAY
OLD = replace(KEEP, first_seen=NOW - 400 * DAY)


def drawn(strand: Strand, width: int = 81, face: Face | None = None, line=OLD) -> tuple[str, str]:
    before, _, after = strip(line, strand, NOW, width, face or Face()).plain.partition("│")
    return before, after


def test_evidence_is_told_by_density_from_a_month_to_a_hundred_years():
    days = (
        (TODAY - 300, 5.0),
        (TODAY - 200, 100.0),
        (TODAY - 100, 1_000.0),
        (TODAY - 50, 5_000.0),
        (TODAY - 9, 4e4),
    )
    past, _ = drawn(Strand(evidence=days))
    order = [past.index(letter) for letter in "─░▒▓█"]
    assert order == sorted(order)


def test_before_a_drive_was_first_seen_there_is_nothing():
    past, _ = drawn(Strand(), line=replace(KEEP, first_seen=NOW - 30 * DAY))
    assert past[:50].strip() == ""
    assert past[-1] == "─"


def test_where_the_call_began_its_first_letter_stands():
    past, _ = drawn(Strand(), line=COPY)
    assert past[-1] == "c"


@pytest.mark.parametrize(
    ("left", "told"),
    [
        (Margin(low=73.0, high=219.0, probability=0.8), "  [═══]"),
        (Margin(low=365.0, high=None, probability=0.8), "          [════════>"),
        (Margin(reason="too little is known"), "····················"),
        (Margin(low=0.0, high=0.0, probability=0.8), "["),
    ],
)
def test_the_margin_is_a_bracket_on_two_years(left, told):
    _, after = drawn(Strand(margin=left))
    assert after.rstrip() == told


@given(
    st.lists(st.tuples(st.integers(TODAY - 500, TODAY), st.floats(1, 1e9)), max_size=20),
    st.floats(0, 9_999),
    st.none() | st.floats(0, 9_999),
    st.integers(0, 150),
    st.booleans(),
)
def test_it_is_exactly_as_wide_as_asked_or_not_there(days, low, more, width, ascii_only):
    left = Margin(low=low, high=None if more is None else low + more, probability=0.8)
    row = strip(
        COPY, Strand(evidence=tuple(sorted(days)), margin=left), NOW, width, Face(ascii_only=ascii_only)
    )
    assert row.cell_len in {0, width}
    assert not ascii_only or row.plain.isascii()
