import pytest
from hypothesis import given, settings, strategies as st

from diskwatch import analyser
from diskwatch.records import CallWord, Cause, Failing, FindingKind, Outcome
from diskwatch.trends import ledger
from tests.samples import DAY, NOON, NVME, SSD, VIRTUAL, attribute, missed, read

MEDIA = 0.5 / 365.25


def lived(*passes, state=None):
    """All steps of a drive's life."""
    steps = []
    state = state or analyser.start()
    for one in passes:
        steps.append(analyser.advance(state, one))
        state = steps[-1].state
    return steps


def kinds(step):
    return [entry.kind for entry in step.happened]


def test_the_first_reading_is_a_level_and_keeps_whatever_it_holds():
    (step,) = lived(read(NOON, reallocated_sectors=1265, pending_sectors=23, self_assessment="passed"))
    assert step.call.word is CallWord.KEEP
    assert step.call.cause is None
    assert "1,265" in step.call.reason
    assert step.findings == ()
    assert step.happened == ()


def test_a_fact_calls_at_once_on_the_first_reading():
    (step,) = lived(read(NOON, reallocated_sectors=1265, attributes=(attribute(5, failing=Failing.NOW),)))
    assert step.call.word is CallWord.RETIRE
    assert kinds(step) == ["call"]


def test_two_passes_with_a_rise_move_ledger_and_damage_by_hand_computed_numbers():
    """Evidence 59.78494049 and a damage measure of 4.

    Day 1 quiet, day 2 with a rise. By hand (bc, 30 digits), with l = 0.5/365.25 a day and the six ratios r:
    R = exp(-(r - 1) l) after day 1, then (R + 1) (1 - exp(-r l)) / (1 - exp(-l)) on day 2.
    Damage: pending 0 -> 16 in eights: R 2 spots (2 bits), P 2 spots (2 bits), V 0: measure 4.
    """
    _, second = lived(
        read(NOON, reallocated_sectors=0, pending_sectors=0),
        read(NOON + DAY, reallocated_sectors=0, pending_sectors=16),
    )
    assert second.evidence["pending-sectors"] == pytest.approx(59.78494049294646, rel=1e-12)
    assert second.evidence["reallocated-sectors"] == second.evidence["pending-sectors"]
    why = analyser.explain(second.state)
    assert why.damage is not None
    assert why.damage.measure == 4
    assert second.call.word is CallWord.LOOK
    assert second.call.cause is Cause.MEDIA
    assert "16" in second.call.reason
    assert kinds(second) == ["rise", "call"]


def test_more_passes_within_a_day_are_one_step_of_the_ledger():
    many = lived(
        *(read(NOON + hour * 1800, pending_sectors=0) for hour in range(20)),
        read(NOON + DAY, pending_sectors=0),
    )
    few = lived(read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=0))
    assert many[-1].evidence == few[-1].evidence


def test_fresh_defects_are_listed_together_with_how_many_there_are_of_each():
    steps = lived(
        read(NOON, pending_sectors=4, reported_uncorrectable=0),
        read(NOON + DAY, pending_sectors=5, reported_uncorrectable=0),
        read(NOON + 2 * DAY, pending_sectors=5, reported_uncorrectable=7),
    )
    assert steps[-1].call.reason.startswith(
        "1 new sector that could not be read and waits (pending), 7 new reads that it gave up"
    )
    assert steps[-1].call.at == NOON + DAY


def test_a_rise_below_the_first_value_is_a_fresh_defect_too():
    steps = lived(
        read(NOON, pending_sectors=40),
        read(NOON + DAY, pending_sectors=0),
        read(NOON + 2 * DAY, pending_sectors=3),
    )
    assert steps[-1].call.reason.startswith("3 new sectors")


def test_the_odds_rule_copies_from_seven_and_retires_from_eleven():
    """Counts of one: 0 -> 65 pending: R 7 bits, P 7 bits: 14. With 0 -> 9: 4 + 4 = 8."""
    copy = lived(
        read(NOON, reallocated_sectors=0, pending_sectors=0),
        read(NOON + DAY, reallocated_sectors=0, pending_sectors=9),
    )
    retire = lived(
        read(NOON, reallocated_sectors=0, pending_sectors=0),
        read(NOON + DAY, reallocated_sectors=0, pending_sectors=65),
    )
    assert (copy[-1].call.word, copy[-1].call.rule) == (CallWord.COPY, "rule:damage-copy")
    assert (retire[-1].call.word, retire[-1].call.evidence) == (CallWord.RETIRE, None)


def test_a_call_stands_when_the_fresh_damage_is_no_longer_fresh():
    steps = lived(
        read(NOON, reallocated_sectors=0, pending_sectors=0),
        read(NOON + DAY, reallocated_sectors=0, pending_sectors=9),
        read(NOON + 40 * DAY, reallocated_sectors=9, pending_sectors=0),
    )
    assert steps[-1].call.word is CallWord.COPY
    assert steps[-1].call.at == NOON + DAY


def test_the_odds_rule_is_asked_of_turning_platters_only():
    steps = lived(
        read(NOON, SSD, reallocated_sectors=0, pending_sectors=0), read(NOON + DAY, SSD, reallocated_sectors=65)
    )
    assert steps[-1].call.word is CallWord.KEEP
    assert analyser.explain(steps[-1].state).damage is None


def test_a_ledger_alarm_is_told_once_and_asks_for_a_look():
    """CRC errors on every tenth day: their norm is two episodes a year."""
    days = [read(NOON + day * DAY, crc_errors=day // 10) for day in range(120)]
    steps = lived(*days)
    drifts = [entry for step in steps for entry in step.happened if entry.kind == "drift"]
    assert len(drifts) == 1
    last = steps[-1].call
    assert (last.word, last.cause) == (CallWord.LOOK, Cause.LINK)
    assert last.evidence >= 0.5 * 3652.5 / 0.10
    assert steps[-1].findings[0].kind is FindingKind.DRIFT


def test_a_single_crc_error_is_noted_and_calls_nothing():
    steps = lived(read(NOON, crc_errors=3), read(NOON + DAY, crc_errors=4))
    assert steps[-1].call.word is CallWord.KEEP
    assert kinds(steps[-1]) == ["rise"]


def test_a_counter_that_fell_invents_nothing_and_is_told():
    steps = lived(
        read(NOON, crc_errors=500), read(NOON + DAY, crc_errors=2), read(NOON + 2 * DAY, crc_errors=2)
    )
    assert kinds(steps[1]) == ["reset"]
    assert steps[2].happened == ()
    assert steps[2].call.word is CallWord.KEEP


def test_a_rewritten_pending_sector_is_no_reset():
    steps = lived(read(NOON, pending_sectors=8), read(NOON + DAY, pending_sectors=0))
    assert steps[-1].happened == ()


def test_a_value_that_is_not_known_is_neither_zero_nor_a_fall():
    steps = lived(
        read(NOON, pending_sectors=8),
        read(NOON + DAY, pending_sectors=None),
        read(NOON + 2 * DAY, pending_sectors=8),
    )
    assert [step.happened for step in steps] == [(), (), ()]


def test_a_gap_counts_the_hours_that_the_drive_was_powered():
    """Ten days away, 48 powered hours: the step after it covers 1 + 2 days."""
    steps = lived(
        read(NOON, pending_sectors=0, power_on_hours=1000),
        read(NOON + 11 * DAY, pending_sectors=0, power_on_hours=1048),
        read(NOON + 12 * DAY, pending_sectors=0, power_on_hours=1072),
    )
    quiet = ledger.count_factors(episode=False, exposure=1, norm_per_day=MEDIA)
    wide = ledger.count_factors(episode=False, exposure=3, norm_per_day=MEDIA)
    by_hand = ledger.after(ledger.after(ledger.empty(), quiet), wide, 3)
    assert steps[-1].evidence["pending-sectors"] == by_hand.evidence


def test_three_passes_without_a_reading_want_a_look_which_ends_when_it_answers():
    steps = lived(
        read(NOON, pending_sectors=0),
        *(missed(NOON + 60 * number, Outcome.TIMED_OUT) for number in (1, 2, 3)),
        read(NOON + 600, pending_sectors=0),
    )
    assert [step.call.word.value for step in steps] == ["keep", "keep", "keep", "look", "keep"]
    assert [kinds(step) for step in steps] == [[], ["pass"], [], ["call"], ["pass", "call"]]


def test_sleep_and_lacking_rights_are_no_fault_of_the_drive():
    steps = lived(*(missed(NOON + 60 * number, Outcome.REFUSED) for number in range(5)))
    assert [step.call for step in steps] == [None] * 5
    steps = lived(
        read(NOON, pending_sectors=0), *(missed(NOON + 60 * number, Outcome.ASLEEP) for number in range(5))
    )
    assert steps[-1].call.word is CallWord.KEEP


def test_falling_asleep_is_told_once_and_waking_up_never():
    steps = lived(
        read(NOON),
        missed(NOON + 1, Outcome.ASLEEP),
        read(NOON + 2),
        missed(NOON + 3, Outcome.ASLEEP),
        read(NOON + 4),
    )
    assert [kinds(step) for step in steps] == [[], ["pass"], [], [], []]


def test_a_virtual_disk_keeps_and_is_told_of_once():
    steps = lived(missed(NOON, Outcome.NO_SMART, VIRTUAL), missed(NOON + 60, Outcome.NO_SMART, VIRTUAL))
    assert [step.call.word for step in steps] == [CallWord.KEEP, CallWord.KEEP]
    assert [kinds(step) for step in steps] == [["pass"], []]


def test_heat_passes_with_the_heat():
    steps = lived(
        read(NOON, NVME, temperature=85, warning_celsius=80),
        read(NOON + 60, NVME, temperature=50, warning_celsius=80),
    )
    assert [step.call.word for step in steps] == [CallWord.LOOK, CallWord.KEEP]


def test_a_clock_set_back_lives_no_day_twice():
    forward = lived(read(NOON, pending_sectors=0), read(NOON + 400 * DAY, pending_sectors=0))
    back = lived(
        read(NOON + DAY, pending_sectors=0), read(NOON + 2 * DAY, pending_sectors=0), state=forward[-1].state
    )
    assert back[0].evidence == forward[-1].evidence
    stream = back[-1].state.streams["media"]
    assert stream.day == (NOON + 2 * DAY) // DAY


COUNTERS = (
    "pending_sectors",
    "reallocated_sectors",
    "crc_errors",
    "reported_uncorrectable",
    "command_timeouts",
)
READINGS = st.lists(
    st.tuples(
        st.integers(min_value=0, max_value=20 * DAY),
        st.dictionaries(st.sampled_from(COUNTERS), st.one_of(st.none(), st.integers(0, 70_000)), max_size=5),
        st.sampled_from([Outcome.READ, Outcome.READ, Outcome.READ, Outcome.ASLEEP, Outcome.GARBLED]),
    ),
    max_size=25,
)


@settings(max_examples=60)
@given(READINGS, st.integers(0, 24))
def test_a_restart_anywhere_changes_nothing(life, cut):
    at, passes = NOON, []
    for gap, signals, outcome in life:
        at += gap
        passes.append(read(at, **signals) if outcome is Outcome.READ else missed(at, outcome))
    whole = lived(*passes)
    first = lived(*passes[:cut])
    kept = analyser.dump(first[-1].state if first else analyser.start())
    second = lived(*passes[cut:], state=analyser.load(kept))
    assert [(step.call, step.findings, step.evidence, step.happened) for step in first + second] == [
        (step.call, step.findings, step.evidence, step.happened) for step in whole
    ]


@settings(max_examples=60)
@given(READINGS)
def test_the_call_never_falls_but_from_findings_about_the_moment(life):
    at, passes = NOON, []
    for gap, signals, outcome in life:
        at += gap
        passes.append(read(at, **signals) if outcome is Outcome.READ else missed(at, outcome))
    calls = [step.call for step in lived(*passes) if step.call and step.call.rule != "fact:unreadable"]
    ranks = [call.word.rank for call in calls]
    assert ranks == sorted(ranks)
