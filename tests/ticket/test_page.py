import unicodedata

from hypothesis import given, strategies as st

from diskwatch.ticket import page as pages
from diskwatch.ticket.page import LINES, WIDTH, page
from diskwatch.units import is_active
from tests.samples import DAY, NOON
from tests.ticket.lives import a_ticket, days, opened


def _columns(line):
    return sum(2 if unicodedata.east_asian_width(letter) in "WF" else 1 for letter in line)


def test_what_a_warranty_desk_asks_for_stands_at_the_top(folder):
    with opened(
        folder, days(30, lambda day: {"crc_errors": day // 10, "pending_sectors": 8 * (day > 9)})
    ) as past:
        made = a_ticket(past, NOON + 30 * DAY)
    lines = page(made).splitlines()
    top = "\n".join(lines[:12])
    for part in ("Model", "Serial", "Firmware", "Size", "WWN", "Powered on", "INV0001", "4 TB"):
        assert part in top
    assert str(made["asked_for"])[:60] in page(made)
    assert lines[-1] == made["digest"]["sha256"]


@given(st.text(max_size=300), st.text(max_size=60))
def test_no_words_break_the_page(words, name):
    for line in (*pages._wrapped(words, "- "), *pages._labelled("Model", name), pages._fit(name, 34)):
        assert _columns(line) <= WIDTH
        assert not any(is_active(letter) for letter in line)


def test_what_moved_stands_with_its_first_and_its_latest_value(folder):
    with opened(folder, days(30, lambda day: {"crc_errors": 7, "pending_sectors": 8 * (day > 9)})) as past:
        lines = page(a_ticket(past, NOON + 30 * DAY)).splitlines()
    (pending,) = [line for line in lines if line.startswith("pending-sectors")]
    assert pending.split() == ["pending-sectors", "0", "8"]
    assert not any(line.startswith("crc-errors") for line in lines)


def test_a_page_too_long_ends_with_its_foot_and_says_what_is_left_out(folder):
    with opened(folder, days(30, lambda day: {"crc_errors": day})) as past:
        made = a_ticket(past, NOON + 30 * DAY)
    made["findings"] = (
        [{**made["findings"][0], "sentence": "Invented trouble. " * 30}] * 4 if made["findings"] else []
    )
    made["asked_for"] = "Please. " * 60
    made["events"] = [
        {"at": made["made_at"], "kind": "call", "text": "An invented call. " * 30, "data": {}}
    ] * 6
    lines = page(made).splitlines()
    assert len(lines) == LINES
    assert any("more lines: see the JSON form" in line for line in lines)
    assert lines[-1] == made["digest"]["sha256"]
