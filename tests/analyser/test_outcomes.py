from diskwatch.records import CallWord, Outcome
from tests.analyser.lives import kinds, lived
from tests.samples import NOON, VIRTUAL, missed, read


def test_three_passes_without_a_reading_want_a_look_which_ends_when_it_answers():
    steps = lived(
        read(NOON, pending_sectors=0),
        *(missed(NOON + 60 * number, Outcome.TIMED_OUT) for number in (1, 2, 3)),
        read(NOON + 600, pending_sectors=0),
    )
    assert [step.call.word.value for step in steps] == ["keep", "keep", "keep", "look", "keep"]
    assert [kinds(step) for step in steps] == [[], ["pass"], [], ["call"], ["pass", "call"]]


def test_sleep_and_lacking_rights_are_no_fault_of_the_drive():
    steps = lived(*(missed(NOON + 60 * number, Outcome.REFUSED) for number in range(5)))
    assert [step.call for step in steps] == [None] * 5
    steps = lived(
        read(NOON, pending_sectors=0), *(missed(NOON + 60 * number, Outcome.ASLEEP) for number in range(5))
    )
    assert steps[-1].call.word is CallWord.KEEP


def test_falling_asleep_is_told_once_and_waking_up_never():
    steps = lived(
        read(NOON),
        missed(NOON + 1, Outcome.ASLEEP),
        read(NOON + 2),
        missed(NOON + 3, Outcome.ASLEEP),
        read(NOON + 4),
    )
    assert [kinds(step) for step in steps] == [[], ["pass"], [], [], []]


def test_a_drive_that_was_read_and_now_denies_having_smart_is_unread_and_a_virtual_one_is_not():
    """A dying drive answers none of the questions by which it is told what it is."""
    steps = lived(read(NOON, pending_sectors=0), *(missed(NOON + n, Outcome.NO_SMART) for n in (1, 2, 3)))
    assert [step.call.word.value for step in steps] == ["keep", "keep", "keep", "look"]
    never = lived(*(missed(NOON + n, Outcome.NO_SMART, VIRTUAL) for n in range(5)))
    assert never[-1].call.word is CallWord.KEEP
