from hypothesis import given, strategies as st
from rich.cells import cell_len
from rich.text import Text

from diskwatch.dashboard.cells import column, cut, ends, fit, wrap
from tests.dashboard.strategies import unhurried


def test_what_fits_is_left_alone():
    assert cut("two words", 9, "…") == "two words"


def test_a_sentence_is_cut_between_words():
    assert cut("It rose from 0 to 24; then it stood.", 30, "…") == "It rose from 0 to 24; then it…"


def test_no_comma_is_left_before_the_mark():
    assert cut("one two, three", 11, "…") == "one two…"


def test_a_long_word_is_cut_within():
    assert cut("INVENTED-WITHOUT-BLANKS", 10, "...") == "INVENTE..."


def test_a_wide_letter_is_never_cut_in_half():
    assert cut("日本語", 4, "…") == "日…"


def test_a_column_has_exactly_its_width():
    assert column("日本語", 4, "…") == "日… "
    assert column("sda", 5, "…") == "sda  "


def test_two_texts_stand_at_either_end():
    assert ends(Text("left"), Text("right"), 12).plain == "left   right"


def test_what_is_too_much_at_the_right_end_is_cut_off():
    assert ends(Text("left"), Text("right"), 8).plain == "left rig"


def test_cutting_a_line_keeps_the_weight_of_what_stays():
    line = fit(Text.assemble(("retire", "bold"), " Photos"), 8)
    assert line.plain == "retire P"
    assert [(part.start, part.end, part.style) for part in line.spans] == [(0, 6, "bold")]


def test_a_paragraph_is_broken_between_words():
    assert wrap("one two three", 7) == ["one two", "three"]


def test_a_word_too_long_for_a_line_is_broken():
    assert wrap("a 123456789 b", 4) == ["a", "1234", "5678", "9 b"]


@unhurried
@given(st.text(), st.integers(0, 60))
def test_nothing_is_wider_than_it_may_be(text, width):
    assert cell_len(cut(text, width, "…")) <= width
    assert fit(Text(text), width).cell_len <= width
    assert cell_len(column(text, width, "…")) <= width


@unhurried
@given(st.text(), st.integers(2, 60))
def test_wrapping_loses_no_word_and_keeps_the_width(text, width):
    lines = wrap(text, width)
    assert all(cell_len(line) <= width for line in lines)
    assert "".join("".join(lines).split()) == "".join(text.split())
