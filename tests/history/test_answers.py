from dataclasses import replace

from diskwatch.history.proof import Printed, printed
from diskwatch.records import CallWord
from tests.history.examples import DAY, NOON, a_call, a_drive, a_part, a_pass, a_place, a_round, a_value


def _round(known, at, words, word=CallWord.KEEP):
    pass_ = replace(a_pass(at, a_value()), answer=words)
    return a_round(a_part(known, pass_, call=a_call(word, NOON)), at=at)


def test_an_answer_is_kept_once_a_day_and_whenever_the_call_changes(history):
    known = history.admit(a_drive(), a_place(), NOON)
    seen = []
    for at, words, word in (
        (NOON, "one", CallWord.KEEP),
        (NOON + 1800, "two", CallWord.KEEP),
        (NOON + 3600, "three", CallWord.LOOK),
        (NOON + 5400, "four", CallWord.LOOK),
        (NOON + DAY, "five\n\x00\xff", CallWord.LOOK),
    ):
        history.record(_round(known, at, words, word))
        kept = printed(history._db.conn, 1)
        assert kept is not None
        seen.append(kept.text)
    assert seen == ["one", "one", "three", "three", "five\n\x00\xff"]
    assert printed(history._db.conn, 1) == Printed(at=NOON + DAY, text="five\n\x00\xff")


def test_a_pass_without_an_answer_leaves_the_last_one(history):
    known = history.admit(a_drive(), a_place(), NOON)
    history.record(_round(known, NOON, "one"))
    history.record(_round(known, NOON + 3 * DAY, None))
    assert printed(history._db.conn, 1) == Printed(at=NOON, text="one")


def test_nothing_is_known_of_a_drive_that_never_answered(history):
    history.admit(a_drive(), a_place(), NOON)
    assert printed(history._db.conn, 1) is None
