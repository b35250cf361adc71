import pytest

from diskwatch import analyser
from diskwatch.records import Outcome
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, VIRTUAL, missed, read


def test_the_chain_names_counters_evidence_thresholds_and_what_one_more_would_do():
    state = analyser.advance(analyser.start(), read(NOON, pending_sectors=4, crc_errors=1)).state
    step = analyser.advance(state, read(NOON + DAY, pending_sectors=4, crc_errors=2))
    why = analyser.explain(step.state)
    assert [(one.signal, one.first, one.latest) for one in why.counters] == [
        ("crc-errors", 1, 2),
        ("pending-sectors", 4, 4),
    ]
    link = next(one for one in why.evidence if one.stream == "link")
    assert link.alarms_at == pytest.approx(18262.5)
    assert link.guaranteed_at == pytest.approx(36525)
    assert link.episodes == 1
    assert link.after_one_more > link.days
    assert why.would_change


def test_a_drive_that_was_never_read_only_needs_a_reading():
    why = analyser.explain(analyser.start())
    assert why.call is None
    assert len(why.would_change) == 1


def test_nothing_read_from_a_virtual_disk_can_change_its_call():
    step = analyser.advance(analyser.start(), missed(NOON, Outcome.NO_SMART, VIRTUAL))
    assert len(analyser.explain(step.state).would_change) == 1


def test_what_ends_a_call_is_told_by_what_it_rests_on():
    link = lived(*(read(NOON + day * DAY, crc_errors=day // 10) for day in range(40)))[-1].state
    pending = lived(read(NOON, pending_sectors=0), read(NOON + DAY, pending_sectors=1))[-1].state
    hot = lived(read(NOON, temperature=80, warning_celsius=70))[-1].state
    assert "30 powered days" in analyser.explain(link).would_change[0]
    assert "90 days" in analyser.explain(pending).would_change[0]
    assert analyser.explain(hot).would_change[0] == "The call ends with what it tells of."


def test_the_chain_holds_the_rule_the_odds_and_the_rows_of_the_table():
    step = lived(
        read(NOON, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, pending_sectors=9, reallocated_sectors=0),
    )[-1]
    why = analyser.explain(step.state)
    assert why.rule is not None
    assert why.odds is not None
    assert why.causation is not None
    assert why.rule.startswith("rule:damage-copy/1: the damage measure is 7 or more")
    assert why.odds.condition == "score-7"
    assert why.causation.rows[0].sign == "media counter"


def test_a_standing_copy_says_that_it_does_not_fall_by_itself():
    state = analyser.advance(analyser.start(), read(NOON, reallocated_sectors=0, pending_sectors=0)).state
    step = analyser.advance(state, read(NOON + DAY, reallocated_sectors=0, pending_sectors=9))
    assert "does not fall by itself" in analyser.explain(step.state).would_change[0]


def test_a_call_that_rests_on_temperature_says_what_ends_it():
    hot = [read(NOON + day * DAY, temperature=36 if day < 40 else 58) for day in range(60)]
    (first, *_) = analyser.explain(lived(*hot)[-1].state).would_change
    assert first.startswith("The call falls when no evidence of running hot is left, at the earliest 14 days")
