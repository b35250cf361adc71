from dataclasses import FrozenInstanceError, replace

import pytest

from diskwatch.dashboard.feed import Feed
from diskwatch.dashboard.questions import Strand
from diskwatch.errors import HistoryError
from diskwatch.records import Bays, LastPass, Outcome
from tests.dashboard.drives import COPY, KEEP, NOW, bays


class Source:
    """A source whose answers are given beforehand; it remembers when it was asked."""

    def __init__(self, *answers: Bays | Exception) -> None:
        self.answers = list(answers)
        self.asked: list[int] = []

    def __call__(self, at: int) -> Bays:
        self.asked.append(at)
        answer = self.answers.pop(0)
        if isinstance(answer, Exception):
            raise answer
        return replace(answer, at=at)


def feed(source: Source) -> Feed:
    clock = iter(range(NOW, NOW + 99))
    return Feed(source, lambda: next(clock))


def test_the_source_is_asked_about_the_present():
    source = Source(bays(KEEP), bays(KEEP))
    asked = feed(source)
    asked.look()
    asked.look()
    assert source.asked == [NOW, NOW + 1]


def test_the_first_answer_is_always_new():
    snapshot = feed(Source(bays(KEEP))).look()
    assert snapshot is not None
    assert snapshot.bays == bays(KEEP)
    assert snapshot.error is None


def test_an_answer_that_differs_by_its_time_alone_is_not_new():
    asked = feed(Source(bays(KEEP), bays(KEEP)))
    asked.look()
    assert asked.look() is None


def test_an_answer_with_another_call_is_new():
    asked = feed(Source(bays(KEEP), bays(COPY)))
    asked.look()
    snapshot = asked.look()
    assert snapshot is not None
    assert snapshot.bays is not None
    assert snapshot.bays.drives == (COPY,)


def test_an_error_is_told_in_its_own_words():
    snapshot = feed(Source(HistoryError("the history is gone", hint="look for it"))).look()
    assert snapshot is not None
    assert snapshot.bays is None
    assert snapshot.error == "the history is gone; look for it"


def test_an_error_leaves_the_drives_as_last_known():
    asked = feed(Source(bays(COPY), HistoryError("the history is gone")))
    asked.look()
    snapshot = asked.look()
    assert snapshot is not None
    assert snapshot.bays is not None
    assert snapshot.bays.drives == (COPY,)
    assert snapshot.error == "the history is gone"


def test_the_same_error_twice_is_not_new():
    asked = feed(Source(HistoryError("gone"), HistoryError("gone")))
    asked.look()
    assert asked.look() is None


def test_the_end_of_an_error_is_new():
    asked = feed(Source(bays(COPY), HistoryError("gone"), bays(COPY)))
    asked.look()
    asked.look()
    snapshot = asked.look()
    assert snapshot is not None
    assert snapshot.error is None


def test_a_fault_of_the_program_is_told_as_one():
    snapshot = feed(Source(KeyError("bays"))).look()
    assert snapshot is not None
    assert snapshot.error == "diskwatch has a fault of its own: KeyError: 'bays'"


def test_a_snapshot_cannot_be_changed():
    snapshot = feed(Source(bays(KEEP))).look()
    assert snapshot is not None
    with pytest.raises(FrozenInstanceError):
        snapshot.error = "no"  # type: ignore[misc]  # that it cannot be set is the point


def test_lines_through_time_follow_the_drives_and_are_asked_anew_only_where_a_pass_or_a_call_came():
    asked: list[Bays] = []
    later = replace(COPY, last_pass=LastPass(at=NOW, outcome=Outcome.READ, explanation=None))
    source = Source(bays(COPY), bays(COPY), bays(COPY), bays(later))

    def strands(told: Bays) -> dict[int, Strand]:
        asked.append(told)
        return {COPY.number: Strand(evidence=((1, float(len(asked))),))}

    clock = iter(range(NOW, NOW + 99))
    made = Feed(source, lambda: next(clock), strands)
    first, second, third, fourth = (made.look() for _ in range(4))
    assert first is not None
    assert first.strands == {}
    assert second is not None
    assert second.strands[COPY.number].evidence == ((1, 1.0),)
    assert third is None
    assert fourth is not None
    assert fourth.strands[COPY.number].evidence == ((1, 2.0),)
    assert len(asked) == 2
