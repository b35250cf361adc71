import unicodedata

import pytest
from hypothesis import given, strategies as st

from diskwatch import units


@pytest.mark.parametrize(
    ("text", "seconds"), [("1s", 1), ("30m", 1800), ("2h", 7200), ("7d", 604_800), (" 5 m ", 300)]
)
def test_durations_are_read(text, seconds):
    assert units.seconds_of(text) == seconds


@pytest.mark.parametrize("text", ["", "0s", "5", "5y", "-1s", "1.5h", "1h30m", "٣s", "1" * 10 + "s"])
def test_what_is_no_duration_is_refused_with_what_is_expected(text):
    with pytest.raises(ValueError, match="such as 1s, 30m, 2h or 7d"):
        units.seconds_of(text)


@given(st.integers(min_value=0, max_value=4_000_000_000))
def test_times_survive_being_written_and_read(at):
    assert units.epoch_of(units.rfc3339(at)) == at


def test_a_time_is_written_as_rfc_3339_gives_it():
    """RFC 3339, section 5.8, first example, without its fraction."""
    assert units.rfc3339(482_196_050) == "1985-04-12T23:20:50Z"


def test_a_time_with_an_offset_and_a_bare_date_are_read():
    """RFC 3339, section 5.8, second example."""
    assert units.epoch_of("1996-12-19T16:39:57-08:00") == units.epoch_of("1996-12-20T00:39:57Z")
    assert units.epoch_of("1970-01-03") == 2 * units.DAY


AMOUNTS = {
    0: "0 bytes",
    999: "999 bytes",
    1000: "1 kB",
    4_200_000: "4.2 MB",
    960_197_124_096: "960 GB",
    999_950_000: "1 GB",
    12_000_138_625_024: "12 TB",
    10**18: "1000 PB",
}


@pytest.mark.parametrize(("count", "said"), AMOUNTS.items())
def test_amounts_are_said_in_decimal_units_as_makers_count(count, said):
    assert units.say_bytes(count) == said


SPANS = {
    0: "0 seconds",
    1: "1 second",
    59: "59 seconds",
    60: "1 minute",
    7200: "2 hours",
    86_400: "1 day",
    40 * 86_400: "40 days",
    70 * 86_400: "2 months",
    3 * 365.25 * 86_400: "3 years",
}


@pytest.mark.parametrize(("seconds", "said"), SPANS.items())
def test_lengths_of_time_are_said_in_their_largest_fitting_unit(seconds, said):
    assert units.say_span(seconds) == said


@given(st.text())
def test_text_made_plain_holds_nothing_that_a_terminal_would_act_on(text):
    made = units.plain(text)
    assert not any(unicodedata.category(letter) in {"Cc", "Cs", "Zl", "Zp"} for letter in made)
    assert not set(made) & set("\u202e\u202d\u2066\u200f")
    assert units.plain(made) == made


def test_ordinary_text_stays_as_it_is():
    assert units.plain("Größe 41 °C, 漢字") == "Größe 41 °C, 漢字"


@pytest.mark.parametrize(
    ("days", "said"),
    [
        (27_000, "once in 73 years"),
        (365.25 * 3.9, "once in 3 years"),
        (365.25, "once in 1 year"),
        (364, "once a year or more often"),
        (365.25 * 999, "once in 990 years"),
        (365.25 * 1239, "once in more than 1,000 years"),
    ],
)
def test_evidence_is_said_in_years_rounded_down_to_two_digits(days, said):
    """27,000 days are 73.92 years: worked example of the method."""
    assert units.once_in(days) == said


@given(st.text())
def test_a_mark_stands_for_each_letter_that_a_terminal_would_act_on_and_all_else_stays(text):
    made = units.without_active(text, lambda letter: f"<{ord(letter)}>")
    assert made == "".join(f"<{ord(one)}>" if units.is_active(one) else one for one in text)


@pytest.mark.parametrize("letter", ["\x1b", "\x7f", "\x9b", "\u200e", "\u202e", "\u2067", "\ufeff", "\udc80"])
def test_escapes_and_letters_that_turn_the_writing_round_are_active(letter):
    assert units.is_active(letter)
    assert not any(map(units.is_active, "\t\n\r aß漢"))
