from dataclasses import replace
from datetime import date

import pytest

from diskwatch import analyser
from diskwatch.judge import odds
from diskwatch.records import CallWord, Cause, FindingKind, Kind
from diskwatch.replay.daily import Row
from diskwatch.replay.table import Table
from tests.analyser.lives import lived
from tests.judge import hazard
from tests.samples import DAY, HDD, NOON, NVME, SSD, read


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


def rotten(at, drive=HDD, **signals):
    return read(at, drive, **{"reallocated_sectors": 0, **signals})


def odds_of(step):
    return next((one for one in step.findings if one.name == "level:odds"), None)


def test_a_first_defect_of_a_hard_drive_comes_with_what_became_of_others():
    step = lived(rotten(NOON, pending_sectors=0), rotten(NOON + DAY, pending_sectors=1))[-1]
    found = odds_of(step)
    assert (found.kind, found.calls, found.data["condition"]) == (
        FindingKind.LEVEL,
        None,
        "first-rise-from-zero",
    )
    assert found.sentence in step.call.reason
    assert step.call.reason.index("1 new sector") < step.call.reason.index("of 100")


def test_trouble_that_begins_after_two_quiet_weeks_gets_an_upper_bound_alone():
    step = lived(rotten(NOON, pending_sectors=0), rotten(NOON + 20 * DAY, pending_sectors=1))[-1]
    assert odds_of(step).data["share"] is None
    assert "fewer than 10 of 100" in step.call.reason


def test_odds_get_worse_with_the_damage_and_end_after_thirty_days():
    days = [rotten(NOON, pending_sectors=0), rotten(NOON + DAY, pending_sectors=65)]
    later = [rotten(NOON + day * DAY, pending_sectors=65) for day in (30, 31)]
    steps = lived(*days, *later)
    assert odds_of(steps[1]).data["condition"] == "score-11"
    assert odds_of(steps[2]) is not None
    assert odds_of(steps[3]) is None
    assert steps[3].call.word is CallWord.RETIRE


@pytest.mark.parametrize("drive", [SSD, NVME, replace(HDD, kind=Kind.USB), replace(HDD, kind=Kind.SAS)])
def test_a_drive_of_a_kind_without_figures_gets_no_odds(drive):
    step = lived(rotten(NOON, drive, pending_sectors=0), rotten(NOON + DAY, drive, pending_sectors=9))[-1]
    assert odds_of(step) is None
    assert "of 100" not in step.call.reason


@pytest.mark.bench
def test_the_analyser_meets_each_condition_on_as_many_drives_of_the_open_data_as_the_recipe(shared):
    """The recipe counts rises and measures by code of its own; both must agree on every drive."""
    states: dict[str, analyser.DriveState] = {}
    table = Table(shared / hazard.FILE)
    for row in table.rows(lambda _: True, lambda _: None):
        assert isinstance(row, Row)
        states[row.serial] = analyser.advance(states.get(row.serial) or analyser.start(), row.pass_).state
    table.close()
    wanted = {serial: hazard.entered(life) for serial, life in hazard.lives(shared / hazard.FILE).items()}
    epoch = date(1970, 1, 1).toordinal()
    differ = [
        serial
        for serial, state in states.items()
        if dict(state.showed)
        != {name: day - epoch for name, day in wanted[serial].items() if name in odds.ORDER}
    ]
    assert differ == []
