from hypothesis import given, strategies as st

from diskwatch.dashboard.chapters import chapter_lines
from diskwatch.dashboard.questions import Chapter
from tests.dashboard.strategies import unhurried


def test_sentences_stand_under_their_title_and_a_part_without_any_is_left_out():
    told = chapter_lines(
        (Chapter(title="Margin", lines=("It is not known.",)), Chapter(title="Empty", lines=())), 40
    )
    assert [row.plain for row in told] == [" Margin", "   It is not known."]


def test_what_has_an_order_is_numbered_and_a_long_sentence_goes_on_below_its_beginning():
    told = chapter_lines((Chapter(title="Order", lines=("one two three", "four"), numbered=True),), 16)
    assert [row.plain for row in told] == [" Order", "   1. one two", "      three", "   2. four"]


@unhurried
@given(st.lists(st.text(max_size=80), max_size=4), st.integers(20, 120))
def test_no_line_is_wider_than_the_page_and_none_holds_what_a_terminal_acts_on(lines, width):
    for row in chapter_lines((Chapter(title="T", lines=tuple(lines)),), width):
        assert row.cell_len <= width
        assert "\x1b" not in row.plain
