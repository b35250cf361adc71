import pytest
from hypothesis import given, strategies as st

from diskwatch.errors import UsageError
from diskwatch.history.exchange import Line, read, written
from tests.history.examples import NOON

cells = (
    st.none()
    | st.booleans()
    | st.integers(-(2**130), 2**130)
    | st.floats(allow_nan=False)
    | st.text(max_size=9)
)
lines = st.builds(
    Line,
    record=st.sampled_from(["pass", "value", "event"]),
    drive=st.integers(0, 9),
    at=st.integers(0, 2**32),
    fields=st.dictionaries(
        st.text(max_size=5).map("x".__add__), cells | st.lists(cells, max_size=3), max_size=4
    ),
)


@pytest.mark.parametrize("form", ["json", "csv"])
@given(st.lists(lines, max_size=6))
def test_what_is_written_reads_back_to_the_letter_in_either_form(form, found):
    back, wrong = read("".join(written(found, form, NOON)))
    assert wrong == ()
    assert [(one.record, one.drive, one.at, one.fields) for one in back] == [
        (one.record, one.drive, one.at, one.fields) for one in found
    ]


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        ("", "first line"),
        ("a,b\n", "first line"),
        ("{", "no whole JSON"),
        ("[" * 100_000, "no whole JSON"),
        ("[1]", "schema is not diskwatch/history/1"),
        ('{"schema":"other","rows":[]}', "schema is not diskwatch/history/1"),
        ('{"schema":"diskwatch/history/1"}', "schema is not diskwatch/history/1"),
    ],
)
def test_a_file_of_another_sort_is_refused_as_a_whole(text, complaint):
    with pytest.raises(UsageError, match=complaint):
        read(text)


@pytest.mark.parametrize(
    "row",
    [
        "pass,1,2026-12-01T12:00:00Z",
        "pass,one,2026-12-01T12:00:00Z,{}",
        "pass,1,noon,{}",
        "pass,1,2026-12-01T12:00:00Z,[1]",
        "pass,1,2026-12-01T12:00:00Z,{",
        'pass,1,2026-12-01T12:00:00Z,"{""x"":{""digits"":""many""}}"',
    ],
)
def test_a_row_that_cannot_be_right_is_named_and_the_others_stay(row):
    good = "pass,1,2026-12-01T12:00:00Z,{}"
    found, wrong = read(f"record,drive,at,fields\n{good}\n{row}\n{good}\n")
    assert [one.number for one in found] == [2, 4]
    assert len(wrong) == 1
    assert wrong[0].startswith("row 3 is left out: ")


@given(st.text(max_size=60))
def test_any_text_is_read_or_refused_in_one_line(text):
    try:
        read(text)
    except UsageError as error:
        told = str(error)
    else:
        told = ""
    assert "\n" not in told
