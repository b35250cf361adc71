from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given, strategies as st

from diskwatch.history.later import PutOff
from diskwatch.notices.policy import (
    GRACE,
    REPEATS,
    TROUBLE_REPEATS,
    About,
    Seen,
    State,
    Told,
    Wishes,
    due,
    minutes_of,
    settled,
    told,
)
from diskwatch.records import CallWord
from tests.samples import DAY, NOON

KEEP, LOOK, COPY, RETIRE = CallWord
NONE = Wishes()
NIGHT = Wishes(quiet=minutes_of("22:00-07:00"))
calls = st.sampled_from(CallWord)


def seen(**calls):
    return Seen(calls=calls)


def live(state, steps, wishes=NONE, *, at=NOON, gap=60, minute=720):
    """Look at each step in turn, tell all that is due; gives what was told and the state."""
    given_ = []
    for one in steps:
        at += gap
        state = settled(state, one, at)
        for notice in due(state, one, wishes, at, minute):
            given_.append((at, notice))
            state = told(state, notice, at)
    return given_, state


def test_a_change_of_call_is_told_at_once_and_once():
    given_, _ = live(State(), [seen(a=KEEP), seen(a=COPY), seen(a=COPY), seen(a=KEEP), seen(a=KEEP)])
    assert [(one.call, one.repeated) for _, one in given_] == [(COPY, False), (KEEP, False)]


def test_a_drive_that_is_called_keep_when_it_is_first_seen_is_not_spoken_of():
    assert live(State(), [seen(a=KEEP)] * 3)[0] == []


def test_what_stands_is_repeated_by_its_call():
    days = 30
    for word, every in REPEATS.items():
        given_, _ = live(State(), [seen(a=word)] * (days * 24), gap=3600)
        times = [at for at, _ in given_]
        assert {later - earlier for earlier, later in pairwise(times)} == {every}
        assert [one.repeated for _, one in given_] == [False] + [True] * (len(given_) - 1)


@pytest.mark.parametrize(("word", "speaks"), [(KEEP, False), (LOOK, False), (COPY, False), (RETIRE, True)])
@pytest.mark.parametrize("minute", [22 * 60, 0, 6 * 60 + 59])
def test_in_quiet_hours_only_retire_speaks(word, speaks, minute):
    state = State(drives={"a": Told(call=LOOK if word is not LOOK else COPY, at=NOON)})
    assert bool(due(state, seen(a=word), NIGHT, NOON + 60, minute)) is speaks
    assert due(state, seen(a=word), NIGHT, NOON + 60, 7 * 60)


def test_quiet_hours_within_one_day_and_none_at_all_are_understood():
    siesta = Wishes(quiet=minutes_of("13:00-15:30"))
    spoken = [minute for minute in range(1440) if due(State(), seen(a=LOOK), siesta, NOON, minute)]
    assert spoken == [*range(13 * 60), *range(15 * 60 + 30, 1440)]
    assert minutes_of("") is None


def test_a_change_that_was_undone_within_quiet_hours_is_not_told():
    _, state = live(State(), [seen(a=LOOK), seen(a=KEEP)], NIGHT, minute=0)
    assert due(state, seen(a=KEEP), NIGHT, NOON + DAY, 720) == ()


def test_what_was_put_off_waits_and_a_stronger_call_breaks_through():
    put = {"a": PutOff(until=NOON + 7 * DAY, call=LOOK)}
    state = State(drives={"a": Told(call=LOOK, at=NOON - 30 * DAY)})
    assert due(state, replace(seen(a=LOOK), put_off=put), NONE, NOON, 720) == ()
    assert due(state, replace(seen(a=LOOK), put_off=put), NONE, NOON + 7 * DAY, 720)
    (one,) = due(state, replace(seen(a=COPY), put_off=put), NONE, NOON, 720)
    assert one.call is COPY


def test_the_strongest_call_is_told_first():
    found = due(State(), seen(a=LOOK, b=RETIRE, c=COPY), NONE, NOON, 720)
    assert [one.drive for one in found] == ["b", "c", "a"]


def test_that_nobody_watches_is_told_after_a_grace_and_then_daily_and_anew_when_it_comes_back():
    troubled = [replace(seen(a=KEEP), troubled_for=second) for second in range(0, 3 * DAY, 60)]
    given_, state = live(State(), troubled)
    assert [one.about for _, one in given_] == [About.TROUBLE] * 3
    assert given_[0][0] == NOON + 60 + GRACE
    assert given_[1][0] - given_[0][0] == TROUBLE_REPEATS
    _, state = live(state, [seen(a=KEEP)])
    assert live(state, [replace(seen(a=KEEP), troubled_for=GRACE)])[0]


def test_the_monthly_word_comes_only_where_it_was_asked_for_and_is_true():
    wish = Wishes(monthly=True)
    steps = [seen(a=KEEP)] * 61
    assert [one.about for _, one in live(State(), steps, wish, gap=DAY)[0]] == [About.CALM] * 3
    assert live(State(), steps, NONE, gap=DAY)[0] == []
    for untrue in (seen(), seen(a=KEEP, b=LOOK), replace(seen(a=KEEP), troubled_for=0)):
        assert all(one.about is not About.CALM for one in due(State(), untrue, wish, NOON, 720))


def test_a_clock_that_was_set_back_by_a_year_silences_no_repeat():
    state = State(drives={"a": Told(call=RETIRE, at=NOON + 365 * DAY)})
    given_, _ = live(state, [seen(a=RETIRE)] * 10, gap=3600)
    assert [at for at, _ in given_] == [NOON + 3600 + REPEATS[RETIRE], NOON + 3600 + 2 * REPEATS[RETIRE]]


def test_a_drive_that_is_gone_is_forgotten_and_met_as_a_new_one():
    state = settled(State(drives={"a": Told(call=LOOK, at=NOON)}), seen(b=KEEP), NOON)
    assert state.drives == {}


@given(st.lists(st.dictionaries(st.sampled_from("abc"), calls, min_size=1), max_size=40), st.booleans())
def test_two_looks_at_the_same_moment_never_tell_twice(history, quiet):
    state, at = State(), NOON
    for known in history:
        at += 600
        state = settled(state, seen(**known), at)
        for one in due(state, seen(**known), NIGHT if quiet else NONE, at, 720):
            state = told(state, one, at)
        assert due(settled(state, seen(**known), at), seen(**known), NONE, at, 720) == ()


@given(st.lists(calls, min_size=1, max_size=60), st.integers(1, 3600))
def test_within_one_stretch_of_a_call_nothing_but_repeats_follow_the_first(words, gap):
    given_, _ = live(State(), [seen(a=word) for word in words], gap=gap)
    changes = [words[0], *(b for a, b in pairwise(words) if a is not b)]
    if words[0] is KEEP:
        changes = changes[1:]
    assert [one.call for _, one in given_ if not one.repeated] == changes


@given(
    st.lists(st.tuples(calls, st.integers(0, 1439), st.booleans()), max_size=60),
    st.integers(1, 7200),
)
def test_whatever_happens_no_more_is_told_in_quiet_hours_than_retire(steps, gap):
    state, at = State(), NOON
    for word, minute, troubled in steps:
        at += gap
        now = replace(seen(a=word), troubled_for=9999 if troubled else None)
        state = settled(state, now, at)
        for one in due(state, now, replace(NIGHT, monthly=True), at, minute):
            state = told(state, one, at)
            assert one.call is RETIRE or 7 * 60 <= minute < 22 * 60


@given(calls, st.integers(0, 10 * DAY))
def test_a_restart_in_between_changes_nothing(word, gone):
    """State is all that a look rests on: what was told yesterday is not told today because of a restart."""
    _, state = live(State(), [seen(a=word)])
    again = due(settled(state, seen(a=word), NOON + 60 + gone), seen(a=word), NONE, NOON + 60 + gone, 720)
    assert all(one.repeated for one in again)
