from diskwatch import analyser
from diskwatch.cli import judged
from diskwatch.records import DriveLine, Forecast
from diskwatch.units import day_number
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, HERE, NOON, SSD, read

LATER = NOON + DAY


def worse(drive=HDD, forecasts=()):
    """A drive that is to be copied, as the history holds it, and its chain."""
    step = lived(
        read(NOON, drive, pending_sectors=0, reallocated_sectors=0, crc_errors=0),
        read(LATER, drive, pending_sectors=9, reallocated_sectors=0, crc_errors=0),
    )[-1]
    line = DriveLine(
        number=1,
        drive=drive,
        place=HERE,
        label=None,
        first_seen=NOON,
        last_pass=None,
        call=step.call,
        findings=step.findings,
        forecasts=forecasts,
    )
    return line, analyser.explain(step.state)


def test_the_cause_is_told_with_its_share_and_each_row_with_its_source():
    _, why = worse()
    told = list(judged.causes(why))
    assert told[0].startswith("media ")
    assert any(one.startswith("showed: media counter (media 90%") and "proposal" in one for one in told)
    assert sum(one.startswith("did not show: ") for one in told) >= 1
    assert list(judged.causes(analyser.explain(analyser.start()))) == []


def test_odds_are_told_with_source_and_footnote_or_the_reason_for_none():
    told = list(judged.odds(worse()[0], LATER))
    assert "21 to 33 of 100" in told[0]
    assert "2013-04-10" in told[1]
    assert "took the drive out" in told[2]
    assert list(judged.odds(worse(SSD)[0], LATER)) == [
        "For drives of this kind we have no figures: the open data are of data-centre hard drives."
    ]


def test_the_margin_comes_with_the_day_of_replacement():
    wear = Forecast(
        signal="percentage-used",
        limit=100,
        made_on_day=day_number(LATER),
        low=3,
        high=9,
        probability=0.8,
        reason=None,
    )
    told = list(judged.margin(worse(forecasts=(wear,))[0], LATER))
    assert "in 3 to 10 days" in told[0]
    assert "replace it by 2024-10-08" in told[1]
    unknown, by = judged.margin(worse()[0], LATER)
    assert unknown.startswith("Margin not known")
    assert "2024-10-19" in by
