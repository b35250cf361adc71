from dataclasses import replace

from diskwatch.history.readings import passes_with_readings
from diskwatch.history.round import file_past_days
from diskwatch.records import Outcome, Reading
from tests.history.examples import DAY, NOON, a_drive, a_part, a_pass, a_place, a_round, a_value


def test_passes_come_back_with_all_that_they_read(history):
    known = history.admit(a_drive(), a_place(), NOON)
    told = [
        a_pass(NOON, a_value(value=1), a_value("crc-errors", 0, "events")),
        a_pass(NOON + 1, a_value(value=1)),
        a_pass(NOON + 2, outcome=Outcome.ASLEEP, explanation="It sleeps."),
        a_pass(NOON + DAY, a_value(value=2**90), a_value("crc-errors", 0, "events")),
        # A unit that became another begins a series of its own.
        a_pass(
            NOON + DAY + 1,
            a_value(value=7, unit="blocks"),
            a_value("crc-errors", None, "events", reason="Why."),
        ),
    ]
    for pass_ in told:
        history.record(a_round(a_part(known, pass_), at=pass_.at))
    connection = history._db.conn

    def back(after: int | None):
        return [
            replace(one, reading=by_name(one.reading)) for one in passes_with_readings(connection, 1, after)
        ]

    def by_name(reading: Reading | None) -> Reading | None:
        return reading and replace(reading, values=tuple(sorted(reading.values, key=lambda one: one.signal)))

    wanted = [replace(one, reading=by_name(one.reading)) for one in told]
    assert back(None) == wanted
    for number, pass_ in enumerate(told):
        assert back(pass_.at) == wanted[number + 1 :]
    with history._writing():
        file_past_days(connection, NOON // DAY + 9)
    assert back(None) == wanted
