from diskwatch.dashboard.weight import WORD_WIDTH, Face, weight_of
from tests.dashboard.drives import ALL, COPY, KEEP, LOOK, RETIRE, UNREAD, VIRTUAL

DENSER = "░▒▓█"


def test_a_graver_call_has_a_denser_bar():
    bars = [weight_of(line).bar for line in (KEEP, LOOK, COPY, RETIRE)]
    assert bars == list(DENSER)


def test_without_blocks_every_call_still_has_its_own_bar():
    bars = [weight_of(line).bar_ascii for line in (KEEP, LOOK, COPY, RETIRE)]
    assert len(set(bars)) == 4
    assert all(bar.isascii() for bar in bars)


def test_a_graver_call_never_has_the_style_of_a_milder_one():
    styles = [weight_of(line).style for line in (KEEP, LOOK, COPY, RETIRE)]
    assert len(set(styles)) == 4


def test_an_unread_drive_weighs_as_much_as_a_look():
    assert weight_of(UNREAD).bar == weight_of(LOOK).bar
    assert weight_of(UNREAD).word == "unread"


def test_a_drive_that_cannot_have_smart_weighs_as_little_as_a_keep():
    assert weight_of(VIRTUAL).bar == weight_of(KEEP).bar
    assert weight_of(VIRTUAL).word == "no SMART"


def test_every_word_fits_its_column_with_a_blank_on_either_side():
    assert all(len(weight_of(line).word) + 2 <= WORD_WIDTH for line in ALL)


def test_the_mark_of_a_cut_is_ascii_where_letters_end_there():
    assert Face(ascii_only=True).mark.isascii()
    assert not Face().mark.isascii()
