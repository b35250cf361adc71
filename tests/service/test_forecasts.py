import pytest

from diskwatch import analyser
from diskwatch.records import DriveRound, KnownDrive, Round
from diskwatch.service.forecasts import EVERY_DAYS, Forecasts
from diskwatch.service.keeper import Keeper
from tests.analyser.lives import lived
from tests.samples import DAY, HDD, HERE, NOON, NVME, read


@pytest.fixture
def keeper(tmp_path):
    keeper = Keeper(tmp_path)
    yield keeper
    keeper.close()


def worn(used, at=NOON, **more):
    return lived(read(at, NVME, percentage_used=used, data_written=1, **more))[-1].state


def test_the_first_reading_of_a_drive_that_wears_brings_its_forecasts(keeper):
    made = Forecasts(keeper).due(1, worn(3, available_spare=100), NOON)
    assert [one.signal for one in made] == ["percentage-used", "available-spare"]


def test_they_are_made_anew_after_a_week(keeper):
    forecasts, state = Forecasts(keeper), worn(3)
    days = [day for day in range(20) if forecasts.due(1, state, NOON + day * DAY)]
    assert days == [0, EVERY_DAYS, 2 * EVERY_DAYS]


def test_they_are_made_anew_when_what_they_speak_of_has_moved(keeper):
    forecasts = Forecasts(keeper)
    assert forecasts.due(1, worn(3), NOON)
    assert not forecasts.due(1, worn(3), NOON + 60)
    assert forecasts.due(1, worn(4), NOON + 120)


def test_a_clock_that_was_set_back_does_not_silence_them(keeper):
    forecasts = Forecasts(keeper)
    assert forecasts.due(1, worn(3), NOON)
    assert forecasts.due(1, worn(3), NOON - 400 * DAY)


def test_a_drive_without_wear_and_without_an_alarm_has_none(keeper):
    state = lived(read(NOON, HDD, pending_sectors=0))[-1].state
    assert not Forecasts(keeper).due(1, state, NOON)


def defective(days, at=0):
    """A disk with a new defect every ten days, and its state."""
    return lived(
        *(
            read(NOON + (at + day) * DAY, HDD, reallocated_sectors=day // 10, pending_sectors=0)
            for day in range(days)
        )
    )[-1].state


def test_an_alarm_that_is_over_has_its_forecast_taken_back(keeper):
    forecasts, alarmed = Forecasts(keeper), defective(60)
    at = NOON + 60 * DAY
    (made,) = forecasts.due(1, alarmed, at)
    assert made.signal == "media-episodes"
    quiet = lived(read(NOON, HDD, pending_sectors=0))[-1].state
    (over,) = forecasts.due(1, quiet, at + 60)
    assert (over.signal, over.known) == ("media-episodes", False)
    assert forecasts.due(1, quiet, at + 120) == ()


def test_a_restart_makes_none_before_its_time(keeper):
    known: KnownDrive = keeper.admit(NVME, HERE, NOON)
    pass_ = read(NOON, NVME, percentage_used=3, data_written=1)
    step = analyser.advance(analyser.start(), pass_)
    made = Forecasts(keeper).due(known.number, step.state, NOON)
    part = a_part(known, pass_, step, made)
    keeper.record(Round(at=NOON, drives=(part,)))
    again = Forecasts(keeper)
    assert not again.due(known.number, step.state, NOON + DAY)
    assert again.due(known.number, step.state, NOON + EVERY_DAYS * DAY)
    again.forget()
    assert not again.due(known.number, step.state, NOON + DAY)


def a_part(known, pass_, step, made):
    return DriveRound(known=known, pass_=pass_, state=analyser.dump(step.state), forecasts=made)
