from dataclasses import replace

from diskwatch.history.forecasts import kept_forecasts, latest_forecasts, write_forecasts
from diskwatch.records import Forecast, LimitSource, Round
from tests.history.examples import DAY, NOON, a_drive, a_place, full_round

TODAY = NOON // DAY
MADE = Forecast(
    signal="percentage-used", limit=100, made_on_day=TODAY, low=120.5, high=400.25, probability=0.8, reason=None
)
SILENT = replace(
    MADE,
    signal="available-spare",
    limit=10,
    low=None,
    high=None,
    reason="it was watched for fewer than 40 powered days",
    limit_from=LimitSource.USUAL,
)


def made(history, *forecasts):
    if not history.known():
        history.admit(a_drive(), a_place(), NOON)
    write_forecasts(history._db.conn, 1, forecasts)


def test_the_latest_about_each_signal_stands_for_a_drive(history):
    later = replace(MADE, made_on_day=TODAY + 7, low=90.0)
    made(history, MADE, SILENT)
    made(history, later)
    assert latest_forecasts(history._db.conn) == {1: (SILENT, later)}
    assert history.forecasts() == {1: (SILENT, later)}


def test_each_is_kept_and_what_became_of_it_once_the_limit_is_reached(history):
    reached = replace(MADE, made_on_day=TODAY + 200, low=0.0, high=0.0)
    made(history, MADE, SILENT, replace(MADE, made_on_day=TODAY + 7))
    made(history, reached)
    kept = {
        (one.forecast.signal, one.forecast.made_on_day - TODAY): one
        for one in kept_forecasts(history._db.conn, 1)
    }
    assert {key: one.reached for key, one in kept.items()} == {
        ("available-spare", 0): None,
        ("percentage-used", 0): TODAY + 200,
        ("percentage-used", 7): TODAY + 200,
        ("percentage-used", 200): None,
    }
    first = kept["percentage-used", 0]
    assert first.forecast.held(reached=first.reached, seen_until=TODAY + 200)


def test_reaching_the_limit_again_changes_no_outcome(history):
    made(history, MADE)
    for day in (200, 207):
        made(history, replace(MADE, made_on_day=TODAY + day, low=0.0, high=0.0))
    assert kept_forecasts(history._db.conn, 1)[0].reached == TODAY + 200


def test_they_come_with_the_round_that_made_them(history):
    known = history.admit(a_drive(), a_place(), NOON)
    whole = full_round(known, NOON, 1)
    (part,) = whole.drives
    history.record(Round(at=NOON, drives=(replace(part, forecasts=(MADE,)),)))
    assert history.forecasts() == {1: (MADE,)}
