import pytest

from diskwatch.replay.cells import BadRow, whole


@pytest.mark.parametrize(("text", "number"), [("12", 12), ("12.0", 12), (" 7 ", 7), ("", None), ("  ", None)])
def test_a_whole_number_may_be_written_as_a_decimal_and_an_empty_field_is_none(text, number):
    assert whole(text, "reads") == number


@pytest.mark.parametrize("text", ["x", "nan", "inf", "1.5", "1e400", "-3"])
def test_what_is_no_count_is_named(text):
    with pytest.raises(BadRow, match="reads"):
        whole(text, "reads")


def test_a_number_below_zero_is_taken_where_it_may_stand():
    assert whole("-1", "size", negative=True) == -1
