import pytest

from diskwatch.machine.command import Answer, Ending
from diskwatch.machine.endings import of_command, of_scan
from tests.machine.test_outcomes import is_a_sentence_about_it


@pytest.mark.parametrize(
    ("answer", "outcome", "word"),
    [
        (Answer(ending=Ending.MISSING), "no-tool", "install"),
        (Answer(ending=Ending.NOT_EXECUTABLE, trouble="Permission denied"), "no-tool", "Permission denied"),
        (Answer(ending=Ending.NOT_STARTED, trouble="Cannot allocate memory"), "no-tool", "memory"),
        (Answer(ending=Ending.TIMED_OUT), "timed-out", "no answer in 60 s"),
        (Answer(ending=Ending.HELD), "timed-out", "stuck in the kernel"),
        (Answer(ending=Ending.STOPPED), "timed-out", "ended"),
        (Answer(ending=Ending.TOO_MUCH), "garbled", "without end and was cut off: see whether [smart] command"),
        (Answer(ending=Ending.ENDED, status=-11), "garbled", "signal 11"),
    ],
)
def test_a_command_that_gave_no_whole_answer_is_told_by_its_ending(answer: Answer, outcome: str, word: str):
    found = of_command(answer, command="smartctl", timeout=60.0)
    assert found is not None
    assert found.outcome == outcome
    assert found.explanation is not None
    assert is_a_sentence_about_it(
        found.explanation.replace("smartctl was not found", "It was").replace(
            "smartctl cannot be run", "It cannot"
        )
    )
    assert word in found.explanation
    assert (of_scan(answer, command="smartctl", timeout=60.0) or "").endswith(".")


def test_a_missing_tool_is_named_with_the_package_that_brings_it():
    found = of_command(Answer(ending=Ending.MISSING), command="smartctl", timeout=60.0)
    assert found is not None
    assert found.explanation == of_scan(Answer(ending=Ending.MISSING), command="smartctl", timeout=60.0)
    assert (found.explanation or "").startswith(
        "smartctl was not found: install smartctl (on Debian and Ubuntu: apt install smartmontools)"
    )


def test_a_list_that_was_given_brings_no_trouble_whatever_its_status():
    assert of_scan(Answer(ending=Ending.ENDED, status=0), command="x", timeout=1) is None
    assert of_scan(Answer(ending=Ending.ENDED, status=1), command="x", timeout=1) is None


def test_a_command_that_ended_by_itself_leaves_the_verdict_to_its_words():
    assert of_command(Answer(ending=Ending.ENDED, status=2), command="x", timeout=1) is None
