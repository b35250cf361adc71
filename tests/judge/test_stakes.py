from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.judge import stakes
from diskwatch.records import CallWord, DriveLine, Forecast, Kind
from diskwatch.units import day_number
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, HERE, NOON, SSD, read

TODAY = day_number(NOON + DAY)


def line(*passes, drive=HDD, forecasts=()):
    """A drive as the history would hold it after some passes."""
    steps = lived(*passes)
    return DriveLine(
        number=1,
        drive=drive,
        place=HERE,
        label=None,
        first_seen=NOON,
        last_pass=None,
        call=steps[-1].call if steps else None,
        findings=steps[-1].findings if steps else (),
        forecasts=forecasts,
    )


def worse(drive=HDD):
    return line(
        read(NOON, drive, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, drive, pending_sectors=9, reallocated_sectors=0),
        drive=drive,
    )


def wear(low, high, reason=None):
    return Forecast(
        signal="percentage-used",
        limit=100,
        made_on_day=TODAY,
        low=low,
        high=high,
        probability=0.8,
        reason=reason,
    )


def test_odds_come_out_of_the_history_as_they_went_in():
    found = stakes.odds_of(worse(), NOON + DAY)
    assert found is not None
    assert (found.condition, found.days, found.drives, found.failed) == ("score-7", 30, 133, 30)
    assert (found.low, found.high, found.level) == pytest.approx((0.208578, 0.326212, 0.8))
    assert "2013" in found.source


def test_odds_of_a_drive_that_nobody_read_since_end_with_their_horizon_all_the_same():
    assert stakes.odds_of(worse(), NOON + 30 * DAY) is not None
    assert stakes.odds_of(worse(), NOON + 31 * DAY) is None
    assert stakes.no_odds_of(worse(), NOON + 31 * DAY)


def test_where_there_are_none_the_reason_is_told_and_never_both():
    assert stakes.no_odds_of(worse(), NOON + DAY) is None
    assert "no figures" in (stakes.no_odds_of(worse(SSD), NOON + DAY) or "")
    assert Kind.SSD is SSD.kind


def test_the_margin_is_that_of_the_forecasts_and_unknown_with_a_reason_without():
    assert stakes.margin_of(replace(worse(), forecasts=(wear(30, 90),)), NOON + DAY).low == 30
    for other in (worse(), line()):
        left = stakes.margin_of(other, NOON + DAY)
        assert not left.known
        assert left.reason


def test_only_a_copy_names_a_day_of_replacement():
    assert worse().call is not None
    assert worse().call.word is CallWord.COPY
    assert stakes.replace_by_of(worse(), NOON + DAY) == TODAY + 14
    assert stakes.replace_by_of(replace(worse(), forecasts=(wear(3, 9),)), NOON + DAY) == TODAY + 3
    assert stakes.replace_by_of(line(read(NOON, pending_sectors=0)), NOON) is None


def test_damaged_data_in_the_history_leads_to_no_odds_and_to_no_error():
    there = worse()
    odds = next(one for one in there.findings if one.name == "level:odds")
    torn = replace(odds, data={"days": "thirty"})
    assert stakes.odds_of(replace(there, findings=(torn,)), NOON + DAY) is None
    assert analyser.start().showed == {}


def test_a_list_tells_the_day_of_replacement_and_a_margin_that_is_known():
    (by,) = stakes.in_time(worse(), NOON + DAY)
    assert "replace it by 2024-10-19" in by
    both = list(stakes.in_time(replace(worse(), forecasts=(wear(30, 90),)), NOON + DAY))
    assert len(both) == 2
    assert list(stakes.in_time(replace(worse(), call=None), NOON + DAY)) == []
