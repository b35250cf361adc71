from dataclasses import replace

from hypothesis import given, strategies as st

from diskwatch.records import Kind, Outcome
from diskwatch.service.pace import IDLE_TIMER, Asked, Seen, Why, after, idle_gap, left_out, turn
from diskwatch.units import DAY

AT = 1_800_000_000
HALF_HOUR = 1_800
SEEN = Seen(at=AT, every=HALF_HOUR, kind=Kind.HDD, worked=True)

asked_drives = st.builds(
    Asked,
    at=st.integers(AT - 2 * DAY, AT + DAY),
    left_out=st.integers(0, 600),
    timeouts=st.integers(0, 500),
    idle=st.integers(0, 500),
)
seen_drives = st.builds(
    Seen,
    at=st.just(AT),
    every=st.floats(1.0, 2.0 * DAY),
    kind=st.sampled_from(Kind),
    worked=st.sampled_from((None, True, False)),
    asleep=st.booleans(),
    hung=st.booleans(),
    wanted=st.booleans(),
)
outcomes = st.sampled_from(Outcome)


def lived(rounds, *, worked, outcome=Outcome.READ, every=HALF_HOUR, kind=Kind.HDD, wakes_after=None):
    """Minutes after the first round at which the drive was asked."""
    asked, when = None, []
    for number in range(rounds):
        at = AT + number * every
        seen = Seen(at=at, every=every, kind=kind, worked=worked)
        if turn(asked, seen).ask:
            when.append((at - AT) // 60)
            ended = Outcome.READ if wakes_after is not None and len(when) > wakes_after else outcome
            asked = after(asked, seen, ended)
        elif asked is not None:
            asked = left_out(asked)
    return when


def test_a_drive_at_work_is_asked_in_every_round():
    assert lived(6, worked=True) == [0, 30, 60, 90, 120, 150]


def test_a_drive_of_which_the_kernel_says_nothing_is_asked_in_every_round():
    assert lived(4, worked=None) == [0, 30, 60, 90]


def test_a_drive_that_does_nothing_is_asked_after_twice_its_idle_timer_then_ever_later_then_daily():
    assert lived(150, worked=False) == [0, 60, 180, 420, 900, 1860, 3270]


def test_a_drive_without_a_motor_is_not_kept_awake_by_asking():
    assert lived(3, worked=False, kind=Kind.NVME) == [0, 30, 60]
    assert lived(3, worked=False, kind=Kind.VIRTUAL) == [0, 30, 60]


def test_a_drive_that_times_out_is_asked_every_second_fourth_and_eighth_round_and_daily_at_last():
    assert lived(160, worked=True, outcome=Outcome.TIMED_OUT) == [0, 60, 180, 420, 900, 1860, 3270, 4680]


def test_the_first_reading_after_time_outs_brings_the_usual_pace_back():
    assert lived(9, worked=True, outcome=Outcome.TIMED_OUT, wakes_after=2) == [0, 60, 180, 210, 240]


def test_an_answer_that_is_no_reading_does_not_prove_that_a_drive_reads_again():
    asked = Asked(at=AT, timeouts=2)
    for outcome in Outcome:
        kept = after(asked, SEEN, outcome).timeouts
        assert kept == {Outcome.READ: 0, Outcome.NO_SMART: 0, Outcome.TIMED_OUT: 3}.get(outcome, 2)


def test_work_ends_the_growing_of_the_gaps():
    asked = Asked(at=AT - HALF_HOUR, idle=5)
    assert turn(asked, SEEN) is Why.DUE
    assert after(asked, SEEN, Outcome.READ).idle == 0


@given(asked_drives | st.none(), seen_drives)
def test_a_drive_that_the_kernel_knows_asleep_is_never_asked(asked: Asked | None, seen: Seen):
    assert turn(asked, replace(seen, asleep=True)) is Why.ASLEEP


@given(seen_drives)
def test_the_first_round_asks_every_drive_that_is_awake(seen: Seen):
    assert turn(None, replace(seen, asleep=False)) is Why.FIRST


@given(asked_drives, seen_drives)
def test_a_known_drive_whose_requests_do_not_move_is_never_asked(asked: Asked, seen: Seen):
    assert not turn(asked, replace(seen, hung=True)).ask


@given(asked_drives, seen_drives)
def test_whoever_wants_all_drives_asked_gets_every_one_that_is_awake_and_moves(asked: Asked, seen: Seen):
    assert turn(asked, replace(seen, wanted=True, asleep=False, hung=False)).ask


@given(asked_drives, seen_drives)
def test_a_drive_awake_is_asked_before_a_day_has_passed(asked: Asked, seen: Seen):
    if turn(asked, replace(seen, asleep=False, hung=False)).ask:
        return
    assert 0 <= seen.at - asked.at <= DAY - seen.every  # so that the next round still comes within the day


@given(asked_drives, seen_drives)
def test_asking_leaves_twice_the_usual_idle_timer_to_a_drive_that_does_nothing(asked: Asked, seen: Seen):
    seen = replace(seen, worked=False, kind=Kind.HDD, wanted=False)
    gone = seen.at - asked.at
    if turn(asked, seen).ask and 0 <= gone < DAY - seen.every:
        assert gone >= 2 * IDLE_TIMER
        assert gone >= idle_gap(asked)


@given(asked_drives, seen_drives, outcomes)
def test_a_drive_that_times_out_is_asked_at_most_every_other_round_but_daily(
    asked: Asked, seen: Seen, outcome: Outcome
):
    asked = after(asked, seen, outcome)
    next_seen = replace(seen, at=seen.at + int(seen.every), wanted=False)
    if outcome is Outcome.TIMED_OUT and 2 * seen.every < DAY:
        assert not turn(asked, next_seen).ask


@given(st.integers(60, 12 * 3600), st.sampled_from((60, 600, HALF_HOUR, 3600)))
def test_whatever_its_own_timer_a_drive_that_does_nothing_falls_asleep(timer: int, every: int):
    asked, busy_at = None, AT
    for at in range(AT, AT + 4 * DAY, every):
        if at - busy_at >= timer:
            return  # it had its time, and sleeps
        seen = Seen(at=at, every=every, kind=Kind.HDD, worked=False)
        if turn(asked, seen).ask:
            asked, busy_at = after(asked, seen, Outcome.READ), at
        else:
            assert asked is not None
            asked = left_out(asked)
    raise AssertionError


def test_whoever_is_left_out_without_a_pass_has_a_sentence_that_says_why_and_nobody_else():
    assert {why for why in Why if why.told is not None} == {Why.HUNG, Why.SILENT, Why.IDLE}
    for why in Why:
        assert why.told is None or (why.told.startswith("It is ") and why.told.endswith("."))
        assert why.told is None or not why.ask
