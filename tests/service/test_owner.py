from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.errors import HistoryError, UsageError
from diskwatch.history.bays import drive_lines
from diskwatch.history.reader import Past
from diskwatch.history.writer import History
from diskwatch.records import CallWord, DriveRound, Outcome, Pass, Round
from diskwatch.service.owner import DEEDS, settle, tell
from tests.history.examples import a_drive, a_place
from tests.samples import DAY, HDD, NOON, read


@pytest.fixture
def history():
    with History.in_memory() as found:
        yield found


def judged(history, passes):
    """A drive with its passes, each judged and kept as the watch does it."""
    known = history.admit(HDD, a_place("/dev/sda"), NOON)
    state = analyser.start()
    for pass_ in passes:
        step = analyser.advance(state, replace(pass_, drive=HDD))
        state = step.state
        part = DriveRound(
            known=known,
            pass_=pass_,
            state=analyser.dump(state),
            findings=step.findings,
            evidence=step.evidence,
            call=step.call,
        )
        history.record(Round(at=pass_.at, drives=(part,)))
    return known


def doubtful(history):
    """A drive whose first fresh pending sectors ask for a look."""
    return judged(
        history,
        [
            read(NOON, pending_sectors=0),
            read(NOON + DAY, pending_sectors=0),
            read(NOON + 2 * DAY, pending_sectors=9),
        ],
    )


def line(history):
    return drive_lines(history._db.conn)[0]


def words(number, because="the cable was changed", replaced_by=None):
    return {"drive": number, "because": because, "replaced_by": replaced_by}


def test_what_is_told_is_kept_with_its_line_in_the_day_book(history):
    known = judged(history, [read(NOON)])
    told = tell(history, {"drive": known.number, "facts": {"label": "left", "asset": ""}}, NOON + DAY)
    assert told.done == ("Told by the owner: label left.", "Taken back by the owner: asset.")
    assert line(history).label == "left"


@pytest.mark.parametrize(
    "words",
    [
        {"drive": 7, "facts": {"label": "x"}},
        {"drive": 1, "facts": {"label": "\x1b"}},
        {"drive": 1, "facts": {"replaced-by": "x"}},
        {"drive": 1, "facts": {"label": "x", "asset": "y" * 1_000_000}},
    ],
)
def test_a_request_that_was_not_looked_at_is_refused_whole(history, words):
    judged(history, [read(NOON)])
    with pytest.raises((HistoryError, UsageError)):
        tell(history, words, NOON)
    assert line(history).label is None


def test_on_the_owners_word_the_call_falls_and_the_state_goes_on_from_there(history):
    known = doubtful(history)
    before = line(history).call
    assert before is not None
    assert before.word is not CallWord.KEEP
    answer = settle(history, words(known.number, "the sectors were rewritten"), NOON + 3 * DAY)
    assert "the sectors were rewritten" in answer.done[0]
    assert answer.done[1] == f"Its call was {before.word} and is now keep."
    after = line(history)
    assert after.call is not None
    assert after.call.word is CallWord.KEEP
    assert after.findings == ()
    state = analyser.load(history.states()[known.number])
    assert state.call == after.call
    assert history.copies(known.number)[-1] == (NOON + 2 * DAY, analyser.dump(state))


def test_the_word_stands_in_the_day_book_beside_the_change_of_the_call(tmp_path):
    with History.open(tmp_path) as history:
        known = doubtful(history)
        settle(history, words(known.number), NOON + 3 * DAY)
    with Past.open(tmp_path) as past:
        book = past.day_book(drive=known.number, since=NOON + 3 * DAY)
    assert [entry.kind for entry in book] == ["settled", "call"]


def test_a_replaced_drive_departs_with_its_call_and_comes_back_when_it_is_met_again(tmp_path):
    with History.open(tmp_path) as history:
        old = doubtful(history)
        new = history.admit(a_drive("INV-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
        call = next(one.call for one in drive_lines(history._db.conn) if one.number == old.number)
        assert len(settle(history, words(old.number, replaced_by=new.number), NOON + 3 * DAY).done) == 2
    with Past.open(tmp_path) as past:
        bays = past.bays(NOON + 3 * DAY)
        assert [one.number for one in bays.drives] == [new.number]
        assert [(one.number, one.call) for one in bays.departed] == [(old.number, call)]
        assert past.find("/dev/sda").owner.replaced_by == "INV-2"
        assert [one.kind for one in past.day_book(drive=new.number)] == ["owner"]
    with History.open(tmp_path) as history:
        gone = Pass(at=NOON + 4 * DAY, outcome=Outcome.ABSENT, explanation="It is gone.")
        history.record(Round(at=gone.at, drives=(DriveRound(known=old, pass_=gone, state=None),)))
        with Past.open(tmp_path) as past:
            assert past.bays(gone.at).departed
        back = read(NOON + 5 * DAY, pending_sectors=9)
        history.record(Round(at=back.at, drives=(DriveRound(known=old, pass_=back, state=None),)))
        with Past.open(tmp_path) as past:
            assert not past.bays(back.at).departed


def test_drives_cannot_take_each_others_places_in_a_circle_until_one_is_met_again(history):
    first = doubtful(history)
    second, third = (
        history.admit(a_drive(f"INV-{nth}", f"/dev/sd{nth}"), a_place(f"/dev/sd{nth}"), NOON) for nth in "bc"
    )
    settle(history, words(first.number, replaced_by=second.number), NOON + 3 * DAY)
    settle(history, words(second.number, replaced_by=third.number), NOON + 3 * DAY)
    for old in (second, third):
        with pytest.raises(UsageError, match="whose own place it has taken"):
            settle(history, words(old.number, replaced_by=first.number), NOON + 4 * DAY)
    assert [one.number for one in history.lines() if not one.departed] == [third.number]
    back = read(NOON + 5 * DAY, pending_sectors=9)
    history.record(Round(at=back.at, drives=(DriveRound(known=first, pass_=back, state=None),)))
    settle(history, words(third.number, replaced_by=first.number), NOON + 6 * DAY)
    assert [one.number for one in history.lines() if not one.departed] == [first.number]


@pytest.mark.parametrize(
    ("because", "replaced_by"),
    [("", None), ("   ", None), ("\x1b]0;x\x07", None), ("x" * 501, None), ("so", 1)],
)
def test_words_that_cannot_be_right_settle_nothing(history, because, replaced_by):
    known = doubtful(history)
    before = line(history)
    with pytest.raises(UsageError):
        settle(history, words(known.number, because, replaced_by), NOON + 3 * DAY)
    assert line(history) == before


def test_a_drive_that_was_never_judged_has_nothing_to_settle(history):
    known = history.admit(HDD, a_place("/dev/sda"), NOON)
    with pytest.raises(HistoryError, match="never been judged"):
        settle(history, words(known.number), NOON)
    with pytest.raises(HistoryError, match="no such drive"):
        settle(history, words(99), NOON)


def test_every_deed_is_known_by_the_name_of_its_request():
    assert set(DEEDS) == {"tell", "settle"}
