from hypothesis import given, strategies as st

from diskwatch.dashboard.keys import DEEDS, MOVES, keys_line
from diskwatch.dashboard.weight import Face
from tests.dashboard.strategies import unhurried


def test_at_eighty_columns_every_key_and_deed_is_told():
    line = keys_line(80, Face()).plain
    for key in (*MOVES, *DEEDS):
        assert key.face in line.split()
        assert key.does in line


def test_on_a_narrow_screen_help_and_quit_stay():
    line = keys_line(40, Face()).plain
    assert "? help" in line
    assert "q quit" in line


def test_the_line_can_be_ascii():
    for width in (40, 80, 120):
        assert keys_line(width, Face(ascii_only=True)).plain.isascii()


def test_every_deed_told_can_be_clicked():
    line = keys_line(80, Face())
    clicks = [
        span.style.meta["@click"] for span in line.spans if hasattr(span.style, "meta") and span.style.meta
    ]
    assert clicks == [f"app.{key.action}" for key in DEEDS]


def test_no_key_does_two_things():
    names = [name for key in (*MOVES, *DEEDS) for name in key.keys.split(",")]
    assert len(names) == len(set(names))


@unhurried
@given(st.integers(1, 200))
def test_the_line_is_never_wider_than_the_screen(width):
    assert keys_line(width, Face()).cell_len <= width
