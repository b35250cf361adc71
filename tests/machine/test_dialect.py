from dataclasses import replace

import pytest

from diskwatch.machine.command import Answer, Ending
from diskwatch.machine.dialect import Knows, complaint_of, lesser

JSON = "=======> UNRECOGNIZED OPTION: json=o"
STATUS = "=======> INVALID ARGUMENT TO -n: standby,3"
LOG = "=======> INVALID ARGUMENT TO -l: devstat"


def said(text: str, status: int = 1) -> Answer:
    return Answer(ending=Ending.ENDED, status=status, out=text.encode())


@pytest.mark.parametrize("line", [JSON, STATUS, LOG, "cat: unrecognized option '--json=o'"])
def test_the_line_that_names_an_option_is_the_complaint(line: str):
    assert complaint_of(said(f"smartctl 7.3\n\n{line}\n")) == line


@pytest.mark.parametrize(
    "answer",
    [
        said(JSON, 0),
        said(f"=== START OF INFORMATION SECTION ===\n{JSON}"),
        said("=======> INVALID ARGUMENT TO -d: sntnew"),
        said("Read Device Identity failed: Input/output error", 2),
        Answer(ending=Ending.TIMED_OUT, out=JSON.encode()),
    ],
)
def test_words_that_stand_in_an_answer_or_speak_of_the_device_are_no_complaint(answer: Answer):
    assert complaint_of(answer) is None


def test_what_a_complaint_names_is_left_out_and_nothing_else():
    whole = Knows()
    assert lesser(whole, JSON) == replace(whole, json=False)
    assert lesser(whole, STATUS) == replace(whole, status=False)
    assert lesser(whole, LOG) == replace(whole, logs=whole.logs - {"devstat"})


def test_a_complaint_that_names_nothing_known_ends_after_all_was_left_out():
    knows, steps = Knows(), 0
    while (less := lesser(knows, "usage: something")) is not None:
        knows, steps = less, steps + 1
    assert (steps, knows.json, knows.status) == (2, False, False)
