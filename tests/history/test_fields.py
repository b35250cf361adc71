import pytest

from diskwatch.history import fields


@pytest.mark.parametrize(
    ("read", "given", "found"),
    [
        (fields.words, None, None),
        (fields.words, "a word", "a word"),
        (fields.text, "half of a pair: \ud800", "half of a pair: \\ud800"),
        (fields.count, None, None),
        (fields.count, 2**70, 2**70),
        (fields.whole, 0, 0),
        (fields.data, {"n": 1}, {"n": 1}),
        (fields.measure, None, None),
        (fields.measure, 3, 3.0),
    ],
)
def test_a_field_comes_as_what_it_is(read, given, found):
    assert read(given) == found


@pytest.mark.parametrize(
    ("read", "given", "why"),
    [
        (fields.words, 5, "no text: 5"),
        (fields.text, None, "no text: None"),
        (fields.count, True, "no whole number: True"),
        (fields.count, 1.5, "no whole number"),
        (fields.whole, None, "a number is missing"),
        (fields.data, [], "its data are no object"),
        (fields.measure, "much", "no number: 'much'"),
        (fields.measure, False, "no number: False"),
    ],
)
def test_a_field_of_another_kind_is_refused_and_told(read, given, why):
    with pytest.raises(ValueError, match=why):
        read(given)
