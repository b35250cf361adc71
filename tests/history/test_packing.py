import pytest
from hypothesis import given, strategies as st

from diskwatch.history import packing
from tests.history import examples


@given(st.text(st.characters()))
def test_packed_text_comes_back_as_it_was(text):
    assert packing.unpacked(packing.packed(text)) == text


@given(examples.readings_beside_values)
def test_a_reading_comes_back_as_it_was_but_for_its_values(reading):
    assert packing.reading(packing.reading_packed(reading)) == reading


@pytest.mark.parametrize(
    "kept",
    [
        b"",
        b"no packed text",
        packing.packed("x")[:-2],
        packing.packed("{}"),
        packing.packed("[1]"),
        packing.packed("{"),
    ],
)
def test_bytes_that_nobody_packed_are_refused(kept):
    with pytest.raises(ValueError, match=r"."):
        packing.reading(kept)


def test_packing_saves_more_than_half_of_a_text_that_repeats():
    text = '{"signal":"pending-sectors","ledger":[0.5,1,0]}' * 30
    assert len(packing.packed(text)) < len(text) / 2


@given(st.dictionaries(st.integers(-(2**15), 2**15 - 1), st.integers(0, 2**16 - 1), max_size=20))
def test_a_histogram_comes_back(counts):
    assert packing.histogram(packing.histogram_packed(counts)) == counts


def test_a_histogram_without_room_or_half_of_one_is_refused():
    with pytest.raises(ValueError, match="no histogram of one day"):
        packing.histogram_packed({0: 2**16})
    with pytest.raises(ValueError, match="damaged"):
        packing.histogram(b"\0\0\0")
