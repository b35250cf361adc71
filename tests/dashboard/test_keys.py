import pytest
from hypothesis import given, strategies as st

from diskwatch.dashboard.keys import BACK, DEEDS, HIDES, MOVES, PACE, SCROLLS, SIEVE, SIGNALS, SPANS, keys_rows
from diskwatch.dashboard.weight import Face
from tests.dashboard.strategies import unhurried

KEYS = (*MOVES, *DEEDS)


def told(width: int, rows: int, face: Face | None = None) -> str:
    return "\n".join(row.plain for row in keys_rows(KEYS, width, face or Face(), rows=rows))


def test_at_eighty_columns_two_rows_tell_every_key_and_deed():
    rows = told(80, 2)
    for key in KEYS:
        assert key.face in rows.split()
        assert key.does in rows


def test_where_there_is_not_enough_room_the_keys_that_jump_go_first():
    rows = told(80, 1)
    assert "PgUp" not in rows
    assert "? help" in rows


def test_on_a_narrow_screen_help_and_quit_stay():
    row = told(40, 1)
    assert "? help" in row
    assert "q quit" in row


def test_the_rows_can_be_ascii():
    for width in (40, 80, 120):
        assert told(width, 2, Face(ascii_only=True)).isascii()


def test_every_deed_told_can_be_clicked():
    clicks = {
        span.style.meta["@click"]
        for row in keys_rows(KEYS, 80, Face(), rows=2)
        for span in row.spans
        if hasattr(span.style, "meta") and span.style.meta
    }
    assert clicks == {key.action for key in KEYS}


@pytest.mark.parametrize(
    "page", [(*MOVES, *DEEDS, *PACE), (BACK, *SCROLLS, *SIGNALS, *SPANS, *DEEDS), (BACK, *SIEVE, *DEEDS), HIDES]
)
def test_no_key_does_two_things_on_one_page(page):
    names = [name for key in page for name in key.keys.split(",")]
    doubled = {name for name in names if names.count(name) > 1}
    # On a page that scrolls the bar of the keyboard reads on, as it unfolds a drive elsewhere.
    assert doubled <= {"space"}


@unhurried
@given(st.integers(1, 200), st.integers(1, 3))
def test_no_row_is_ever_wider_than_the_screen_and_no_more_are_told_than_there_is_room_for(width, rows):
    drawn = keys_rows(KEYS, width, Face(), rows=rows)
    assert 1 <= len(drawn) <= rows
    assert all(row.cell_len <= width for row in drawn)
