from hypothesis import given, strategies as st

from diskwatch.dashboard.help import help_lines
from diskwatch.dashboard.keys import DEEDS, MOVES
from diskwatch.dashboard.weight import Face
from diskwatch.records import CallWord
from tests.dashboard.strategies import unhurried


def page(width: int = 80, troubles: tuple[str, ...] = (), face: Face | None = None) -> str:
    return "\n".join(row.plain for row in help_lines("watching from here", troubles, width, face or Face()))


def test_the_page_explains_every_call():
    rows = page().split("\n")
    for word in CallWord:
        assert any(row.startswith(f" {word} ") for row in rows)


def test_the_page_gives_the_usual_cautions():
    told = " ".join(page().split())
    for caution in (
        "Back up first",
        "Stop writing",
        "off and on",
        "do not open it",
        "professionals",
        "warranty",
    ):
        assert caution in told
    assert "No tool can promise that a drive will not fail." in told


def test_the_page_tells_every_key():
    rows = page().split("\n")
    for key in (*MOVES, *DEEDS):
        assert any(row.split()[:1] == [key.face] for row in rows)


def test_the_page_holds_every_trouble_in_full():
    long = "The folder /srv/state cannot be written: no space is left on the device, so new calls are not kept."
    told = " ".join(page(40, (long,)).split())
    assert "What is wrong now" in told
    assert long in told
    assert "What is wrong now" not in page()


def test_the_page_tells_how_the_screen_was_opened():
    assert "watching from here" in page()


def test_the_page_can_be_ascii():
    assert page(face=Face(ascii_only=True)).isascii()


@unhurried
@given(st.integers(12, 200), st.text(max_size=200))
def test_no_line_is_wider_than_the_screen(width, trouble):
    assert all(row.cell_len <= width for row in help_lines("w", (trouble,), width, Face()))
