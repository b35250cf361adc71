import pytest
from hypothesis import given, settings, strategies as st

from diskwatch import analyser
from diskwatch.records import CallWord, Cause, Failing, Outcome
from tests.analyser.lives import kinds, lived
from tests.samples import DAY, NOON, NVME, VIRTUAL, attribute, missed, read


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


def test_a_virtual_disk_keeps_and_is_told_of_once():
    steps = lived(missed(NOON, Outcome.NO_SMART, VIRTUAL), missed(NOON + 60, Outcome.NO_SMART, VIRTUAL))
    assert [step.call.word for step in steps] == [CallWord.KEEP, CallWord.KEEP]
    assert [kinds(step) for step in steps] == [["pass"], []]


def test_heat_stands_for_three_days_after_it_last_showed_so_that_hot_noons_are_one_finding():
    hot = {"temperature": 85, "warning_celsius": 80}
    cool = {"temperature": 50, "warning_celsius": 80}
    steps = lived(
        read(NOON, NVME, **hot),
        read(NOON + DAY // 2, NVME, **cool),
        read(NOON + DAY, NVME, **hot),
        read(NOON + 3 * DAY, NVME, **cool),
        read(NOON + 4 * DAY, NVME, **cool),
    )
    assert [step.call.word.value for step in steps] == ["look", "look", "look", "look", "keep"]
    assert sum(kinds(step).count("call") for step in steps) == 2


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
