from diskwatch.history.proof import Printed
from diskwatch.records import Failing, SelfTest
from diskwatch.ticket.stated import answer_part, attributes_part, self_tests_part
from tests.samples import attribute, reading

TEST = SelfTest(
    name="Extended", result="read failure", extended=True, passed=False, unreadable=True, hours=90, lba=2**60
)


def test_the_attribute_table_is_told_as_printed():
    told = attributes_part(reading(attributes=(attribute(5, failing=Failing.NOW),))).value
    assert isinstance(told, list)
    assert (told[0]["number"], told[0]["raw"], told[0]["failing"]) == (5, "1265", "now")


def test_self_tests_are_told_with_their_first_bad_block():
    told = self_tests_part(reading(self_tests=(TEST,))).value
    assert isinstance(told, list)
    assert (told[0]["lba"], told[0]["unreadable"], told[0]["passed"]) == (2**60, True, False)


def test_before_the_first_reading_the_reason_is_told():
    assert attributes_part(None).reason == self_tests_part(None).reason == "The drive has not been read yet."


def test_an_answer_is_told_whole_or_says_how_much_is_missing():
    assert answer_part(Printed(at=0, text="abc"), 5).value == {
        "at": "1970-01-01T00:00:00Z",
        "text": "abc",
        "left_out": 0,
    }
    assert answer_part(Printed(at=0, text="abcdefg"), 5).value == {
        "at": "1970-01-01T00:00:00Z",
        "text": "abcde",
        "left_out": 2,
    }
    assert answer_part(None, 5).reason
