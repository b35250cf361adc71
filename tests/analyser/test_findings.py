from diskwatch import analyser
from diskwatch.records import CallWord, Cause, FindingKind
from tests.analyser.lives import lived
from tests.samples import DAY, NOON, SSD, read


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
