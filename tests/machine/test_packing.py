import pytest
from hypothesis import given, strategies as st

from diskwatch.machine import packing


@pytest.mark.parametrize(
    ("raw", "value"), [("0", 0), ("1265", 1_265), ("0 (2000 0)", 0), ("594 (Average 594)", 594)]
)
def test_a_plain_count_is_itself_whatever_stands_in_brackets(raw: str, value: int):
    assert packing.count(raw) == (value, None)


@pytest.mark.parametrize("raw", ["65535", "16777215", "4294967295", "281474976710655"])
def test_a_full_counter_is_not_known(raw: str):
    value, reason = packing.count(raw)
    assert value is None
    assert reason


@pytest.mark.parametrize("raw", ["0/123", "0x51769394de98", "0 0 0", "4295032833", "12h", "", "-3", "1.5"])
def test_a_count_that_is_packed_in_an_unknown_way_is_not_known(raw: str):
    value, reason = packing.count(raw)
    assert value is None
    assert reason


@given(st.lists(st.integers(1, 65_534), min_size=3, max_size=3))
def test_three_words_are_read_printed_apart_or_as_one_number(words: list[int]):
    high, middle, low = sorted(words)
    for raw in (f"{high} {middle} {low}", str((high << 32) | (middle << 16) | low)):
        assert packing.low_word(raw) == (low, None)
        assert packing.middle_word(raw) == (middle, None)
        assert packing.high_word(raw) == (high, None)


def test_a_full_low_word_or_a_strange_one_is_not_known():
    assert packing.low_word("0 0 65535")[0] is None
    assert packing.low_word("1 1")[0] is None
    assert packing.low_word("70000 1 1")[0] is None


@given(st.integers(65_536, 2**32 - 1))
def test_a_number_that_may_be_a_count_as_well_as_words_is_neither(number: int):
    assert packing.low_word(str(number))[0] is None
    assert packing.middle_word(str(number))[0] is None


@given(st.integers(0, 65_535), st.integers(0, 65_535), st.integers(1, 65_535))
def test_words_that_rise_from_the_low_one_up_are_no_words(low: int, middle: int, high: int):
    number = str((high << 32) | (middle << 16) | low)
    assert (packing.words(number) is None) is not (low >= middle >= high)


def test_of_a_pair_the_first_counts():
    assert packing.first_of_pair("1204/1177") == (1_204, None)
    assert packing.first_of_pair("1204") == (1_204, None)
    assert packing.first_of_pair("1204/x")[0] is None
    assert packing.first_of_pair("65535") == (65_535, None)


@given(st.integers(1, 2**24 - 2), st.integers(1, 2**24 - 2))
def test_a_pair_in_one_number_is_believed_where_loads_and_unloads_agree(loads: int, unloads: int):
    raw = str((unloads << 24) | loads)
    assert packing.first_of_pair(raw)[0] == (loads if abs(loads - unloads) <= 1 else None)
    assert packing.first_of_pair(str((loads << 24) | loads)) == (loads, None)


def test_a_full_counter_of_a_pair_is_not_known():
    assert [packing.first_of_pair(str(2**bits - 1))[0] for bits in (24, 32, 48)] == [None] * 3


@pytest.mark.parametrize(
    "raw", ["33124", "33124h+17m", "33124h+17m+05s", "33124h+17m+05.250s", "33124 (143 119 0)"]
)
def test_hours_are_read_however_they_are_printed(raw: str):
    assert packing.hours(raw) == (33_124, None)


@given(st.integers(0, 350_000), st.integers(1, 2**24 - 1))
def test_a_number_that_holds_more_than_hours_gives_none(hours: int, above: int):
    assert packing.hours(str((above << 24) | hours)) == (None, packing.PACKED)


def test_more_hours_than_drives_exist_are_not_believed():
    assert packing.hours("350640") == (350_640, None)
    for raw in ("350641", "16777215", "9999999h+00m"):
        value, reason = packing.hours(raw)
        assert (value, reason != packing.PACKED) == (None, True)


def test_a_bare_number_under_a_name_that_says_minutes_is_no_hours():
    assert packing.stated_hours("1987440")[0] is None
    assert packing.stated_hours("33124h+00m") == (33_124, None)


@pytest.mark.parametrize(
    ("raw", "value"),
    [("41", 41), ("41 (Min/Max 20/45)", 41), ("30 (2 100 0 0 0)", 30), ("-5", -5), (str(0x2D0014_0029), 41)],
)
def test_the_current_temperature_is_found_among_its_extremes(raw: str, value: int):
    assert packing.celsius(raw) == (value, None)


def test_the_extremes_are_read_where_they_are_printed():
    for decode, celsius in ((packing.lowest_celsius, 20), (packing.highest_celsius, 45)):
        assert decode("41 (Min/Max 20/45)") == (celsius, None)
        assert decode("41 (Min/Max 20/45 #3)") == (celsius, None)
        assert decode("41")[0] is None
    assert packing.lowest_celsius("-2 (Min/Max -20/45)") == (-20, None)
    assert packing.highest_celsius("41 (Min/Max 20/200)")[0] is None


def test_a_rate_is_errors_in_operations_printed_apart_or_packed_by_makers_that_are_known_to():
    assert packing.rate("3/60234824", packs=False) == (3, 60_234_824)
    assert packing.rate(str((2 << 32) | 2_426_688), packs=True) == (2, 2_426_688)
    assert packing.rate("60234824", packs=False) is None
    assert packing.rate("60234824 (1)", packs=True) is None
    assert packing.rate(str(2**48), packs=True) is None


@pytest.mark.parametrize("raw", ["200", "-61", "151", "41.5", "hot", "1310720", "65536"])
def test_a_temperature_that_no_drive_has_is_not_known(raw: str):
    value, reason = packing.celsius(raw)
    assert value is None
    assert reason


def test_a_volume_is_a_whole_number_that_is_not_full():
    assert packing.volume("204918331904") == (204_918_331_904, None)
    assert packing.volume("4294967295")[0] is None
    assert packing.volume("12/34")[0] is None


@pytest.mark.parametrize(
    ("number", "unit", "value"),
    [
        (-4, "hours", None),
        (0, "hours", 0),
        (350_641, "hours", None),
        (0x1FF, "bits", None),
        (256, "percent", None),
        (101, "percent", None),
        (100, "percent", 100),
        (10**60, "errors", None),
        (-1, "sectors", None),
        (0, "sectors", 0),
        (2**100, "bytes", 2**100),
        (-5, "celsius", -5),
        (10**9, "celsius", None),
    ],
)
def test_only_temperatures_go_below_zero_and_no_drive_ran_for_longer_than_there_are_drives(
    number: int, unit: str, value: int | None
):
    found, reason = packing.sane(number, unit)
    assert found == value
    assert (found is None) is (reason is not None)


def test_used_endurance_goes_on_beyond_a_hundred_percent():
    assert packing.sane(255, "percent", "percentage-used") == (255, None)
    assert packing.sane(256, "percent", "percentage-used")[0] is None


@given(st.text(max_size=30))
def test_every_decoder_answers_every_text_with_a_value_or_a_reason(raw: str):
    for decode in (
        packing.count,
        packing.volume,
        packing.low_word,
        packing.middle_word,
        packing.high_word,
        packing.lowest_celsius,
        packing.highest_celsius,
        packing.first_of_pair,
        packing.hours,
        packing.stated_hours,
        packing.celsius,
    ):
        value, reason = decode(raw)
        assert (value is None) is (reason is not None)
