from dataclasses import replace

from diskwatch import analyser
from diskwatch.analyser.between import drifted
from diskwatch.records import CallWord, Cause, Finding, FindingKind
from tests.samples import NOON


def found(at=NOON, evidence=9_000.0):
    return Finding(
        name="drift:invented",
        kind=FindingKind.DRIFT,
        signals=("invented",),
        since=at,
        calls=CallWord.LOOK,
        cause=Cause.UNCLEAR,
        evidence=evidence,
        sentence="It does what it did not.",
        data={"signal": "invented"},
    )


def test_a_drift_is_told_once_and_calls_and_stands_since_it_began():
    state, happened = drifted(analyser.start(), [found()], at=NOON)
    assert [entry.kind for entry in happened] == ["drift", "call"]
    assert happened[0].data == {"evidence": 9_000.0, "signal": "invented"}
    assert state.call is not None
    assert state.call.word is CallWord.LOOK
    later, more = drifted(state, [found(NOON + 60, 9_500.0)], at=NOON + 60)
    assert more == ()
    assert later.standing["drift:invented"] == replace(found(NOON), evidence=9_500.0)
    assert later.call == state.call


def test_where_nothing_is_found_nothing_changes():
    assert drifted(analyser.start(), [], at=NOON) == (analyser.start(), ())
