from diskwatch import analyser
from diskwatch.records import Outcome
from diskwatch.ticket.steps import Step, Trace
from diskwatch.units import day_number
from tests.samples import DAY, NOON, missed, read

TODAY = day_number(NOON)


def _steps(*passes, stream="link"):
    trace = Trace(analyser.start())
    for one in passes:
        trace.take(one)
    run = trace.run(stream)
    return None if run is None else run.steps


def test_quiet_days_in_a_row_are_one_step():
    passes = [read(NOON + day * DAY, crc_errors=0) for day in range(5)]
    assert _steps(*passes) == (Step(day=TODAY + 1, exposure=1.0, rose=False, days=4),)


def test_a_day_with_a_rise_parts_from_those_before_it():
    passes = [read(NOON + day * DAY, crc_errors=0) for day in range(3)]
    late = read(NOON + 2 * DAY + 3_600, crc_errors=1)
    assert _steps(*passes, late) == (
        Step(day=TODAY + 1, exposure=1.0, rose=False),
        Step(day=TODAY + 2, exposure=1.0, rose=True),
    )


def test_a_rise_on_the_first_day_is_one_of_the_step_that_was_open():
    passes = [read(NOON, crc_errors=0), read(NOON + 60, crc_errors=4), read(NOON + 90, crc_errors=9)]
    assert _steps(*passes) == (Step(day=TODAY, exposure=None, rose=True),)


def test_a_gap_counts_the_powered_days_in_it():
    passes = [
        read(NOON, crc_errors=0, power_on_hours=100),
        missed(NOON + DAY, Outcome.TIMED_OUT),
        read(NOON + 5 * DAY, crc_errors=0, power_on_hours=148),
    ]
    assert _steps(*passes) == (Step(day=TODAY + 5, exposure=3.0, rose=False),)


def test_a_ledger_that_the_drive_does_not_have_has_no_way():
    assert _steps(read(NOON, crc_errors=0), stream="media") is None
