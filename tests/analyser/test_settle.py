from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.records import CallWord, Cause, Outcome, Settled
from tests.analyser.lives import kinds, lived
from tests.samples import DAY, NOON, missed, read


def loose_cable(days=40):
    """CRC errors every other week until the ledger alarms, beside a fresh pending sector."""
    return [
        read(NOON + day * DAY, crc_errors=day // 10, pending_sectors=0, reallocated_sectors=0)
        for day in range(days)
    ]


def word(at, *signals, because="cable changed", replaced_by=None):
    return Settled(at=at, because=because, signals=signals, replaced_by=replaced_by)


def settled(state, said):
    """The step that the owner's word leads to."""
    return analyser.settle(state, said)


def test_the_owners_word_ends_the_finding_at_once_and_the_day_book_hears_both():
    before = lived(*loose_cable())[-1]
    assert (before.call.word, before.call.cause) == (CallWord.LOOK, Cause.LINK)
    step = settled(before.state, word(NOON + 40 * DAY, "crc-errors", "link-resets"))
    assert step.call.word is CallWord.KEEP
    assert step.findings == ()
    assert kinds(step) == ["settled", "call"]
    assert "cable changed" in step.call.reason
    assert step.happened[0].data["ended"] == ["drift:link"]


def test_evidence_begins_anew_so_that_the_ended_finding_does_not_come_back_by_itself():
    state = settled(lived(*loose_cable())[-1].state, word(NOON + 40 * DAY)).state
    later = lived(read(NOON + 41 * DAY, crc_errors=3, pending_sectors=0), state=state)[-1]
    assert later.call.word is CallWord.KEEP
    assert later.evidence["crc-errors"] < 10


def test_damaged_transfers_soon_after_the_word_bring_the_call_back_at_once():
    state = settled(lived(*loose_cable())[-1].state, word(NOON + 40 * DAY)).state
    soon = lived(read(NOON + 50 * DAY, crc_errors=4), state=state)[-1]
    assert (soon.call.word, soon.call.rule, soon.call.cause) == (CallWord.LOOK, "fact:link-again", Cause.LINK)
    quiet = lived(*(read(NOON + day * DAY, crc_errors=3) for day in range(41, 90)), state=state)[-1].state
    late = lived(read(NOON + 90 * DAY, crc_errors=4), state=quiet)[-1]
    assert late.call.word is CallWord.KEEP


def test_a_word_about_the_cable_ends_no_finding_about_the_media():
    passes = loose_cable()
    passes[-1] = read(NOON + 39 * DAY, crc_errors=3, pending_sectors=2, reallocated_sectors=0)
    before = lived(*passes)[-1]
    step = settled(before.state, word(NOON + 40 * DAY, "crc-errors", "link-resets"))
    assert step.call.word is CallWord.LOOK
    assert [one.name for one in step.findings] == ["fact:first-defect", "level:odds"]


def test_defects_are_counted_from_the_word_on():
    first = lived(read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=3))[-1].state
    state = settled(first, word(NOON + 2 * DAY, because="seen, watching")).state
    same = lived(read(NOON + 3 * DAY, pending_sectors=3), state=state)[-1]
    more = lived(read(NOON + 4 * DAY, pending_sectors=5), state=same.state)[-1]
    assert same.call.word is CallWord.KEEP
    assert more.call.word is CallWord.LOOK
    assert more.call.reason.startswith("2 new sectors")


def test_no_word_ends_what_the_drive_still_says_of_itself():
    failed = lived(read(NOON, self_assessment="failed"))[-1].state
    step = settled(failed, word(NOON + 60, because="I do not believe it"))
    assert step.call.word is CallWord.KEEP
    assert lived(read(NOON + DAY, self_assessment="failed"), state=step.state)[-1].call.word is CallWord.RETIRE


def test_a_drive_that_was_replaced_is_not_missed():
    state = lived(read(NOON, crc_errors=0))[-1].state
    replaced = settled(state, word(NOON + 60, because="replaced", replaced_by="INV0009")).state
    gone = [missed(NOON + hours * 3600, Outcome.ABSENT) for hours in range(1, 6)]
    assert lived(*gone, state=replaced)[-1].call.word is CallWord.KEEP
    assert lived(*gone, state=state)[-1].call.word is CallWord.LOOK


def test_settling_a_drive_that_was_never_read_only_takes_the_word_down():
    step = settled(analyser.start(), word(NOON))
    assert step.call is None
    assert kinds(step) == ["settled"]


def test_what_the_owner_wrote_stays_inert_and_survives_a_restart():
    state = lived(*loose_cable())[-1].state
    step = settled(state, word(NOON + 40 * DAY, because="\x1b[31mnew cable"))
    assert "\x1b" not in step.call.reason
    assert analyser.load(analyser.dump(step.state)) == step.state


@pytest.mark.parametrize("signals", [(), ("crc-errors",), ("pending-sectors",)])
def test_a_clock_that_was_set_back_breaks_no_ledger(signals):
    state = lived(*loose_cable())[-1].state
    after = settled(state, replace(word(NOON - 9 * DAY), signals=signals)).state
    assert lived(read(NOON + 41 * DAY, crc_errors=3, pending_sectors=0), state=after)
