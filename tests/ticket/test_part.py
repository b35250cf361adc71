from hypothesis import given, strategies as st

from diskwatch.ticket.part import LONGEST, at, plain_data, short


def test_a_time_that_no_calendar_has_is_not_known():
    assert at(0) == "1970-01-01T00:00:00Z"
    assert at(None) is None
    assert at(2**60) is None


@given(st.none() | st.text(max_size=50))
def test_a_text_of_usual_length_stays_as_it_is(words):
    assert short(words) == words


def test_a_text_longer_than_anybody_reads_is_cut_and_says_so():
    assert short("x" * (LONGEST + 5)) == "x" * LONGEST + " [... 5 letters left out]"


def test_data_are_cut_in_length_number_and_depth():
    deep: object = 1
    for _ in range(50):
        deep = {"in": [deep]}
    told = plain_data({"deep": deep, "many": list(range(10_000)), "long": "x" * 10_000, "k" * 999: 1})
    assert isinstance(told, dict)
    assert len(told["many"]) == 200
    assert len(told["long"]) < 5_000
    assert max(map(len, told)) == 200
    assert "[...]" in str(told["deep"])
