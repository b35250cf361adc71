from dataclasses import replace

from diskwatch import analyser
from diskwatch.records import CallWord, Cause, DriveRound, Forecast, KnownDrive, Outcome, ReplayedDrive
from diskwatch.rehearsal.story import Story
from tests.samples import DAY, HDD, HERE, NOON, missed, read

KNOWN = KnownDrive(number=1, drive=HDD, place=HERE, first_seen=NOON)


def story(*passes) -> Story:
    """The story of a drive that was judged by the real analyser."""
    one, state = Story(serial="INV0001", model="x"), analyser.start()
    for pass_ in passes:
        step = analyser.advance(state, pass_)
        state = step.state
        one.take(
            DriveRound(
                known=KNOWN,
                pass_=replace(pass_, drive=HDD),
                state=None,
                findings=step.findings,
                evidence=step.evidence,
                call=step.call,
            )
        )
    return one


def told(*passes) -> ReplayedDrive:
    one = story(*passes).told
    assert one is not None
    return one


def test_a_drive_that_was_never_asked_has_no_story():
    assert Story(serial="x", model="y").told is None


def test_the_first_call_and_each_change_of_it_is_told_once_with_its_cause():
    one = told(*(read(NOON + day * DAY, pending_sectors=8 * (day > 1)) for day in range(5)))
    assert [(call.at, call.word, call.cause) for call in one.calls] == [
        (NOON, CallWord.KEEP, None),
        (NOON + 2 * DAY, CallWord.LOOK, Cause.MEDIA),
    ]
    assert (one.rows, one.first, one.last, one.warned_at) == (5, NOON, NOON + 4 * DAY, None)


def test_error_counters_that_rose_are_told_and_levels_are_none():
    one = story(*(read(NOON + day * DAY, pending_sectors=8, crc_errors=day) for day in range(3)))
    assert one.moved == {"crc-errors": 2}


def test_a_ledger_alarm_is_told_once_by_the_counter_that_rose():
    one = told(*(read(NOON + day * DAY, crc_errors=day // 8) for day in range(80)))
    assert [(drift.signal, drift.evidence > 18_000) for drift in one.drifts] == [("crc-errors", True)]


def test_passes_without_a_reading_are_counted_apart_and_sleep_is_none():
    one = story(read(NOON), missed(NOON + 60, Outcome.ASLEEP), missed(NOON + 120, Outcome.TIMED_OUT))
    assert (one.days, one.missed, one.last) == (1, 1, NOON)


def test_a_new_cause_behind_the_same_call_is_remembered_but_is_no_new_call():
    passes = [read(NOON, pending_sectors=0, temperature=70, warning_celsius=60)]
    passes.append(read(NOON + DAY, pending_sectors=8, temperature=30, warning_celsius=60))
    one = story(*passes)
    assert [(said.call.cause, said.changed) for said in one.said] == [(Cause.HEAT, True), (Cause.MEDIA, False)]


def test_forecasts_that_say_when_are_remembered_and_the_day_on_which_a_limit_was_reached():
    one = Story(serial="INV0001", model="x")
    for day, low, high in ((1, None, None), (2, 5.0, 9.0), (8, 0.0, 0.0), (9, 0.0, 0.0)):
        made = Forecast(
            signal="available-spare",
            limit=10,
            made_on_day=day,
            low=low,
            high=high,
            probability=0.8,
            reason=None if low is not None else "too little to say",
        )
        pass_ = replace(read(NOON + day * DAY), drive=HDD)
        one.take(DriveRound(known=KNOWN, pass_=pass_, state=None, forecasts=(made,)))
    assert [made.made_on_day for made in one.forecasts] == [2, 8, 9]
    assert one.reached == {"available-spare": 8}


def test_copy_and_retire_are_warnings():
    one = told(*(read(NOON + day * DAY, reallocated_sectors=8**day) for day in range(1, 6)))
    assert one.worst is CallWord.RETIRE
    assert one.warned_at is not None
