from dataclasses import replace

import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import DriveUnknown
from diskwatch.history.naming import choose
from diskwatch.records import DriveLine, LastPass, Outcome
from tests.history.examples import NOON, a_drive, a_place


def a_line(
    number: int,
    serial: str,
    device: str,
    *,
    label: str | None = None,
    outcome: Outcome = Outcome.READ,
    at: int = NOON,
) -> DriveLine:
    return DriveLine(
        number=number,
        drive=a_drive(serial, device),
        place=a_place(device),
        label=label,
        first_seen=NOON,
        last_pass=LastPass(at=at, outcome=outcome, explanation=None),
        call=None,
    )


LINES = (
    a_line(1, "INV-1000", "/dev/sda", label="attic"),
    a_line(2, "INV-10001", "/dev/sdb"),
    a_line(3, "INV-2000", "/dev/bus/0 megaraid,7"),
)


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("INV-1000", 1),
        ("inv-10001", 2),
        (str(LINES[0].drive.identity.wwn).upper(), 1),
        ("/dev/sda", 1),
        ("sdb", 2),
        ("ATTIC", 1),
        ("att", 1),
        ("0001", 2),
        ("megaraid,7", 3),
        ("  2000 ", 3),
    ],
)
def test_a_drive_is_meant_by_any_of_its_names_or_a_part_of_one(text, number):
    assert choose(text, LINES).number == number


def test_a_whole_name_wins_over_parts_of_others():
    lines = (*LINES, a_line(4, "SOMETHING", "/dev/sdc", label="1000"))
    assert choose("1000", lines).number == 4


def test_a_name_that_fits_none_names_those_there_are():
    with pytest.raises(DriveUnknown, match="no drive is called elm") as caught:
        choose("elm", LINES)
    assert "/dev/sda (serial INV-1000, label attic)" in str(caught.value)


def test_a_name_that_fits_several_names_these_only():
    with pytest.raises(DriveUnknown, match="more than one drive") as caught:
        choose("INV-1", LINES)
    assert "INV-10001" in str(caught.value)
    assert "INV-2000" not in str(caught.value)


@pytest.mark.parametrize("text", ["", "   "])
def test_an_empty_name_means_no_drive(text):
    with pytest.raises(DriveUnknown, match="no drive is named"):
        choose(text, LINES)


def test_where_no_drive_was_ever_seen_that_is_said():
    with pytest.raises(DriveUnknown, match="no drive has been seen yet"):
        choose("sda", ())


def test_a_long_list_of_candidates_is_cut_and_counted():
    lines = tuple(a_line(number, f"INV-{number}", f"/dev/x{number}") for number in range(1, 13))
    with pytest.raises(DriveUnknown, match="and 4 more"):
        choose("INV", lines)


def test_a_device_name_means_the_drive_that_was_seen_there_last():
    gone = a_line(8, "OLD", "/dev/sda", outcome=Outcome.ABSENT, at=NOON + 60)
    replaced = a_line(9, "OLDER", "/dev/sda", at=NOON - 60)
    assert choose("sda", (gone, *LINES, replaced)).number == 1
    assert choose("OLD", (gone, *LINES)).number == 8


def test_a_drive_that_is_gone_still_goes_by_its_device_while_no_other_took_it():
    assert choose("sda", (a_line(8, "OLD", "/dev/sda", outcome=Outcome.ABSENT), LINES[1])).number == 8


def test_two_drives_seen_at_one_device_at_once_are_told_apart_by_serial_alone():
    lines = (a_line(1, "TWIN-A", "/dev/sda"), a_line(2, "TWIN-B", "/dev/sda"))
    with pytest.raises(DriveUnknown):
        choose("sda", lines)
    assert choose("TWIN-A", lines).number == 1


def test_a_drive_not_asked_yet_counts_as_there():
    new = replace(a_line(8, "NEW", "/dev/sda"), last_pass=None, first_seen=NOON + 60)
    assert choose("sda", (*LINES, new)).number == 8


def test_what_drives_call_themselves_cannot_write_to_the_terminal():
    lines = (a_line(1, "IN\x1b[2JV", "/dev/sda"),)
    with pytest.raises(DriveUnknown) as caught:
        choose("\x1b[31mx", lines)
    assert "\x1b" not in str(caught.value)


@given(
    st.lists(st.text(st.characters(codec="ascii", categories=["L", "N"]), min_size=1), unique_by=str.casefold)
)
def test_every_drive_with_a_serial_of_its_own_is_found_by_it(serials):
    lines = tuple(a_line(n, serial, f"/dev/{n:-^60}") for n, serial in enumerate(serials))
    for number, serial in enumerate(serials):
        assert choose(serial, lines).number == number
