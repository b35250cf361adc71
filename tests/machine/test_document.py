from diskwatch.machine.document import (
    dig,
    document_of,
    flag_at,
    in_shape,
    messages,
    natural_at,
    number_at,
    plain_lines,
    rows_at,
    text_at,
)


def test_only_a_json_object_is_a_document():
    assert document_of('{"a": 1}') == {"a": 1}
    for output in (
        "",
        "smartctl 7.3",
        "[1]",
        '{"a": 1',
        '{"a":' * 100_000,
        "{} trailing",
        '{"a": ' + "9" * 5_000 + "}",
    ):
        assert document_of(output) is None


def test_a_number_of_128_bits_stays_exact():
    document = document_of(f'{{"log": {{"data": {2**128 - 1}}}}}')
    assert number_at(document, "log", "data") == 2**128 - 1


def test_the_exact_text_beside_a_large_number_is_taken():
    assert number_at({"data": 3.4e38, "data_s": str(2**128 - 1)}, "data") == 2**128 - 1
    assert number_at({"data": 7, "data_s": "not a number"}, "data") == 7


def test_what_is_missing_or_of_another_sort_is_none():
    document = {"a": {"b": True, "c": 1.5, "d": "x", "e": [1, {"f": 2}]}}
    assert number_at(document, "a", "b") is None
    assert number_at(document, "a", "c") is None
    assert number_at(document, "a", "d", "deeper") is None
    assert text_at(document, "a", "b") is None
    assert flag_at(document, "a", "d") is None
    assert rows_at(document, "a", "e") == ({"f": 2},)
    assert rows_at(document, "a", "d") == ()
    assert dig(document, "none", "none") is None


def test_a_number_that_a_field_cannot_hold_is_none():
    row = {"value": 256, "worst": -1, "hours": 0}
    assert natural_at(row, "value") == 256
    assert natural_at(row, "value", most=255) is None
    assert natural_at(row, "worst") is None
    assert natural_at(row, "hours") == 0
    assert natural_at(row, "none") is None


def test_a_document_is_in_shape_unless_a_member_is_of_another_sort_than_smartctl_writes():
    assert in_shape({})
    assert in_shape({"smartctl": {"version": [7, 3]}, "serial_number": "INVENTED-1", "unknown": 5})
    assert not in_shape({"smartctl": {"version": "7.3"}})
    assert not in_shape({"serial_number": 7})
    assert not in_shape({"power_on_time": [1]})


def test_the_plain_text_and_the_complaints_are_found():
    document = {
        "smartctl": {"output": ["one", 2, "three"], "messages": [{"string": "bad"}, {"severity": "x"}, 3]}
    }
    assert plain_lines(document) == ("one", "three")
    assert messages(document) == ("bad",)
    assert plain_lines({}) == ()
