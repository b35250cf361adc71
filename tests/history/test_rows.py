import sqlite3
from contextlib import closing

import pytest
from hypothesis import given, strategies as st

from diskwatch.history import rows
from diskwatch.records import LastPass, Outcome, Pass
from tests.history import examples
from tests.history.examples import NOON


def stored(row: tuple[rows.Cell, ...]) -> rows.Row:
    """A row as it comes back from SQLite."""
    marks = ", ".join("?" * len(row))
    with closing(sqlite3.connect(":memory:")) as connection:
        names = ", ".join(f"c{n} ANY" for n in range(len(row)))
        connection.execute(f"CREATE TABLE kept ({names}) STRICT")
        connection.execute(f"INSERT INTO kept VALUES ({marks})", row)  # noqa: S608  # made of question marks
        found: rows.Row = connection.execute("SELECT * FROM kept").fetchone()
        return found


@given(examples.values)
def test_a_value_comes_back_as_it_was(value):
    (kept,) = stored((rows.cell(value),))
    back = rows.value(kept)
    assert back == value
    assert type(back) is type(value)


@pytest.mark.parametrize("value", [2**63 - 1, 2**63, -(2**63), -(2**63) - 1, 2**128 - 1, "9223372036854775808"])
def test_both_sides_of_the_largest_number_come_back(value):
    (kept,) = stored((rows.cell(value),))
    assert rows.value(kept) == value


@given(examples.drives, examples.places, examples.times)
def test_a_drive_comes_back_as_it_was(drive, place, at):
    known = rows.known_drive((7, *stored(rows.drive_row(drive, place)), at))
    assert (known.number, known.drive, known.place, known.first_seen) == (7, drive, place, at)


@given(examples.findings)
def test_a_finding_comes_back_as_it_was(finding):
    assert rows.finding(stored(rows.finding_row(finding))) == finding


@given(examples.calls)
def test_a_call_comes_back_as_it_was(call):
    assert rows.call(stored(rows.call_row(call))) == call


@given(examples.entries)
def test_an_entry_of_the_day_book_comes_back_as_it_was(entry):
    assert rows.entry(stored(rows.entry_row(entry))) == entry


@given(st.text(st.characters()))
def test_any_text_can_be_kept_and_comes_back_unless_it_holds_half_a_letter(text):
    (kept,) = stored((rows.text(text),))
    assert kept == rows.text(text)
    if text.isprintable():
        assert kept == text


def test_half_of_a_surrogate_pair_becomes_its_escape():
    assert rows.text("a\udc80b") == "a\\udc80b"
    assert rows.text_or_none(None) is None


@given(examples.times, st.integers(0, 65_535), examples.times, st.integers(0, 65_535))
def test_slots_stand_in_order_of_minute_and_then_of_drive(at, drive, other_at, other):
    assert (rows.slot(at, drive) < rows.slot(other_at, other)) == ((at // 60, drive) < (other_at // 60, other))


@pytest.mark.parametrize("drive", [-1, 65_536])
def test_a_drive_that_would_fall_into_anothers_slot_is_refused(drive):
    with pytest.raises(ValueError, match="no number of a drive"):
        rows.slot(NOON, drive)


def test_passes_come_back():
    assert rows.last_pass((None, None, None)) is None
    assert rows.last_pass((NOON, "asleep", "It sleeps.")) == LastPass(
        at=NOON, outcome=Outcome.ASLEEP, explanation="It sleeps."
    )
    assert rows.past_pass((NOON, "read", 4, 12, None)) == Pass(
        at=NOON, outcome=Outcome.READ, exit_bits=4, took_ms=12
    )


@pytest.mark.parametrize(
    "damaged",
    [
        lambda: rows.value(1.5),
        lambda: rows.value(b"no digits"),
        lambda: rows.last_pass((NOON, "no such outcome", None)),
        lambda: rows.mounts("7"),
        lambda: rows.number("ten"),
        lambda: rows.known_drive((1, None, None, None, "p", "hdd", None, "ten", None, "d", None, "[]", 0)),
        lambda: rows.known_drive((1, None, None, None, "p", "hdd", None, 1, None, "d", None, "[[1]]", 0)),
    ],
)
def test_a_row_that_nobody_wrote_is_refused(damaged):
    with pytest.raises(ValueError, match=r"."):
        damaged()


@pytest.mark.parametrize("data", ["[1]", "{"])
def test_what_happened_is_told_also_where_what_stands_behind_it_cannot_be_read(data):
    entry = rows.entry((NOON, None, "rise", "It rose.", data))
    assert entry.text.startswith("It rose. (What stands behind this line cannot be read")
    assert entry.data == {}
