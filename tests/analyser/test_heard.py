from dataclasses import replace

from diskwatch import analyser
from diskwatch.records import KERNEL_LOG, CallWord, Cause, Kind, Outcome, Settled, SignalKind, Value
from tests.analyser.lives import kinds, lived
from tests.samples import DAY, HDD, NOON, missed, read

VIRTUAL = replace(HDD, kind=Kind.VIRTUAL, rotation_rpm=None)


def heard(pass_, **counts):
    """A pass with what the other senses count."""
    values = {"kernel_io_errors": 0, "link_resets": 0, **counts}
    return replace(
        pass_,
        heard=tuple(
            Value(
                signal=name.replace("_", "-"),
                value=value,
                unit="events",
                kind=SignalKind.COUNT,
                source=KERNEL_LOG,
            )
            for name, value in values.items()
        ),
    )


def without_smart(at, **counts):
    return heard(missed(at, Outcome.NO_SMART, VIRTUAL), **counts)


def test_a_sector_that_the_kernel_could_not_read_makes_it_look_at_once_even_on_the_first_pass():
    (step,) = lived(heard(read(NOON), unreadable_sectors=1, last_unreadable_sector=2048))
    assert step.call.word is CallWord.LOOK
    assert step.call.rule == "fact:unreadable-sector"
    assert step.call.cause is Cause.MEDIA
    assert "last at sector 2,048" in step.call.reason


def test_a_drive_without_smart_is_judged_by_what_was_heard():
    quiet, loud, later = lived(
        without_smart(NOON), without_smart(NOON + 60, dropouts=1), without_smart(NOON + 120, dropouts=1)
    )
    assert quiet.call.word is CallWord.KEEP
    assert (loud.call.word, loud.call.rule) == (CallWord.LOOK, "fact:dropped-out")
    assert later.call.word is CallWord.LOOK
    assert later.call.at == loud.call.at


def test_a_drive_that_no_longer_answers_is_judged_by_what_was_heard():
    _, step = lived(read(NOON), heard(missed(NOON + 60, Outcome.TIMED_OUT), dropouts=1, kernel_timeouts=2))
    assert step.call.rule == "fact:dropped-out"
    assert step.state.latest["kernel-timeouts"] == 2


def test_a_first_count_of_resets_is_a_level_and_a_rise_is_counted_but_not_told_twice():
    first, second = lived(heard(read(NOON), link_resets=5), heard(read(NOON + DAY), link_resets=6))
    assert first.call.word is CallWord.KEEP
    assert second.state.streams["link"].episodes == 1
    assert "rise" not in kinds(second)


def test_enough_occasions_of_resets_are_a_drift_of_the_link():
    passes = [heard(read(NOON + day * DAY, power_on_hours=24 * day), link_resets=day // 9) for day in range(60)]
    last = lived(*passes)[-1]
    assert last.call.word is CallWord.LOOK
    assert (last.call.rule, last.call.cause) == ("drift:link", Cause.LINK)


def test_silence_of_the_kernel_moves_no_ledger_of_a_drive_that_sleeps_or_is_away():
    before = lived(heard(read(NOON)))[-1].state
    for outcome in (Outcome.ASLEEP, Outcome.ABSENT):
        after = lived(heard(missed(NOON + 3 * DAY, outcome)), state=before)[-1].state
        assert after.streams == before.streams


def test_what_is_heard_of_a_drive_that_sleeps_counts_all_the_same():
    before = lived(heard(read(NOON)))[-1].state
    (step,) = lived(heard(missed(NOON + DAY, Outcome.ASLEEP), kernel_io_errors=1), state=before)
    assert step.state.streams["kernel-errors"].episodes == 1


def test_where_nothing_listens_no_ledger_begins():
    (step,) = lived(read(NOON))
    assert "kernel-errors" not in step.state.streams


def test_an_array_that_lacks_a_member_asks_for_a_look_until_it_is_whole():
    lacking, whole, silent = lived(
        heard(read(NOON), degraded_arrays=1),
        heard(read(NOON + 60), degraded_arrays=0),
        without_smart(NOON + 120, degraded_arrays=0),
    )
    assert lacking.call.rule == "fact:array-degraded"
    assert whole.call.word is CallWord.KEEP
    assert silent.call.word is CallWord.KEEP
    one, none = lived(without_smart(NOON, degraded_arrays=1), without_smart(NOON + 60, degraded_arrays=0))
    assert one.call.word is CallWord.LOOK
    assert none.call.word is CallWord.KEEP


def test_the_owners_word_ends_it_and_only_more_of_it_speaks_again():
    state = lived(heard(read(NOON), unreadable_sectors=2))[-1].state
    word = Settled(at=NOON + 60, because="restored from a backup", signals=("unreadable-sectors",))
    settled = analyser.settle(state, word)
    assert settled.call is not None
    assert settled.call.word is CallWord.KEEP
    same, more = lived(
        heard(read(NOON + 120), unreadable_sectors=2),
        heard(read(NOON + 180), unreadable_sectors=3),
        state=settled.state,
    )
    assert same.call.word is CallWord.KEEP
    assert "1 place" in more.call.reason


def test_a_state_goes_through_text_to_the_same_bits():
    state = lived(heard(read(NOON), dropouts=1), without_smart(NOON + DAY, dropouts=2))[-1].state
    assert analyser.load(analyser.dump(state)) == state
