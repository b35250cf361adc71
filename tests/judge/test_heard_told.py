import pytest

from diskwatch.judge import heard_told
from diskwatch.judge.heard import FROM_NOTHING
from diskwatch.records import Event, EventKind


@pytest.mark.parametrize("kind", EventKind)
def test_every_event_is_one_sentence_that_names_the_device(kind):
    told = heard_told.happened(Event(kind=kind, subject="sdq", seconds=1.0, sector=2048, words="why"))
    assert "sdq" in told
    assert told.endswith(".")
    assert "{" not in told


@pytest.mark.parametrize("signal", sorted(FROM_NOTHING))
def test_one_and_many_are_told_apart(signal):
    assert heard_told.counted(signal, 1) != heard_told.counted(signal, 2)
    assert "{" not in heard_told.counted(signal, 2)


def test_hostile_words_of_the_kernels_log_stay_inert():
    told = heard_told.happened(
        Event(kind=EventKind.FILE_SYSTEM, subject="s\x1b[2Jda", seconds=1.0, words="comm \x1b]0;x\x07{name}")
    )
    assert "\x1b" not in told
    assert "\x07" not in told


def test_what_is_not_known_is_said_to_be_so():
    told = heard_told.happened(Event(kind=EventKind.UNREADABLE, subject="sdq", seconds=1.0))
    assert "not told" in told
