"""Invented drives with calls, for the tests of notices."""

from diskwatch.records import Call, CallWord, Cause, DriveLine, LastPass, Mount, Outcome, Place
from tests.samples import HDD, NOON

HERE = Place(device="/dev/sda", bay="bay-1", lives_here=(Mount(point="/srv/photos"),))


def call(word, *, cause=None, reason="16 new sectors wait (pending).", at=NOON):
    return Call(
        word=CallWord(word),
        at=at,
        cause=None if cause is None else Cause(cause),
        cause_probability=None,
        cause_second=None,
        reason=reason,
        rule="invented",
        evidence=None,
    )


def line(word, *, drive=HDD, place=HERE, label=None, number=1, **more):
    return DriveLine(
        number=number,
        drive=drive,
        place=place,
        label=label,
        first_seen=NOON,
        last_pass=LastPass(at=NOON, outcome=Outcome.READ, explanation=None),
        call=None if word is None else call(word, **more),
    )
