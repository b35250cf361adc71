import pytest
from hypothesis import given, strategies as st

from diskwatch.machine.text import Sheet, decoded, hexadecimal, is_of_smartctl, lines_of, names_version, whole


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("0", 0),
        ("1,911", 1_911),
        ("158,333,549 [81.0 TB]", 158_333_549),
        ("24’646’582 [12.6 TB]", 24_646_582),
        ("29.426.647 [15,0 TB]", 29_426_647),
        ("1 000 204 886 016 [1,00 TB]", 1_000_204_886_016),
        ("500\u00a0107\u00a0862\u00a0016 bytes [500 GB]", 500_107_862_016),
        ("500\ufffd107\ufffd862\ufffd016 [500 GB]", 500_107_862_016),
        ("340,282,366,920,938,463,463,374,607,431,768,211,455", 2**128 - 1),
        ("100%", 100),
        ("41 Celsius", 41),
        ("7200 rpm", 7_200),
    ],
)
def test_a_number_is_read_whole_however_its_thousands_are_set_apart(text: str, number: int):
    assert whole(text) == number


@pytest.mark.parametrize(
    "text", ["", "-", "4,830,6x6", "12,34", "1,2345", "1,234.567", "1.5", "33124h+17m", "<not available>", "٣"]
)
def test_half_a_number_is_no_number(text: str):
    assert whole(text) is None


@given(st.integers(0, 2**128), st.sampled_from([",", ".", "'", "’", "\u00a0", "\u202f"]))
def test_setting_thousands_apart_never_changes_the_number(number: int, apart: str):
    assert whole(f"{number:,}".replace(",", apart)) == number


@given(st.integers(0, 2**64))
def test_hexadecimal_numbers_come_back(number: int):
    assert hexadecimal(f"0x{number:02x}") == number


def test_hexadecimal_without_its_mark_or_with_more_behind_it_is_no_number():
    assert hexadecimal("10") is None
    assert hexadecimal("0x10 0x20") is None


def test_labels_are_found_whatever_blanks_they_are_padded_with():
    sheet = Sheet.of(["Warning  Comp. Temperature Time:    7", "  number of hours powered up = 8347.20"])
    assert sheet.get("Warning Comp. Temperature Time") == "7"
    assert sheet.get("number of hours powered up") == "8347.20"


def test_an_empty_value_gives_way_to_a_later_one_and_then_to_none():
    sheet = Sheet.of(["Serial Number:", "Serial number:   AB12", "Revision:"])
    assert sheet.get("Serial Number") == "AB12"
    assert sheet.get("Revision") is None
    assert sheet.get("Product") is None


def test_a_label_that_stands_twice_keeps_both_values():
    sheet = Sheet.of(
        ["SMART support is: Available - device has SMART capability.", "SMART support is: Disabled"]
    )
    assert sheet.all("SMART support is") == ("Available - device has SMART capability.", "Disabled")


@given(st.binary(max_size=200))
def test_any_bytes_become_text_and_lines(output: bytes):
    Sheet.of(decoded(output).splitlines())


@pytest.mark.parametrize(
    ("line", "version", "own"),
    [
        ("smartctl 7.3 2022-02-28 r5338 [x86_64-linux-6.1.0] (local build)", True, True),
        ("smartctl pre-7.5 2024-11-01 r5600", True, True),
        ("smartctl version 5.38", True, True),
        ("Smartctl open device: /dev/sdq [SAT] failed: Input/output error", False, True),
        ("Read Device Identity failed: Input/output error", False, True),
        ("=== START OF INFORMATION SECTION ===", False, True),
        ("smartctl: command not found", False, False),
        ("AAAA", False, False),
        ("", False, False),
    ],
)
def test_the_tools_version_is_told_from_its_complaints_and_both_from_words_of_others(
    line: str, version: bool, own: bool
):
    assert (names_version(line), is_of_smartctl(line)) == (version, own)


def test_a_line_ends_at_a_line_feed_and_nowhere_else():
    assert lines_of("a\r\nSerial Number: X\x1c\x85\u2028\x0bY\n\nb\n") == (
        "a",
        "Serial Number: X\x1c\x85\u2028\x0bY",
        "",
        "b",
    )
    assert lines_of("") == ()
    assert lines_of("\n") == ("",)


@given(st.text(alphabet="ab \n", max_size=20))
def test_text_without_odd_letters_is_split_as_always(text: str):
    assert lines_of(text) == tuple(text.splitlines())
