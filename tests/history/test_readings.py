from dataclasses import replace

from hypothesis import given, strategies as st

from diskwatch.history.moments import Dated
from diskwatch.history.readings import passes_with_readings
from diskwatch.history.stating import file_past_days
from diskwatch.history.writer import History
from diskwatch.records import Attribute, Failing, Outcome, Pass, Reading
from tests.history.examples import DAY, NOON, a_drive, a_part, a_pass, a_place, a_round, a_value

ATTRIBUTE = Attribute(
    number=197, name="Invented", value=1, worst=1, threshold=9, prefail=True, raw="1", failing=None
)


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
        since = None if after is None else Dated(turn=0, at=after, state="")
        return [
            replace(one, reading=by_name(one.reading)) for _, one in passes_with_readings(connection, 1, since)
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


@given(
    st.lists(
        st.tuples(st.integers(-2, 2), st.integers(0, 3), st.sampled_from(["read", "asleep", "lost"])),
        min_size=1,
        max_size=12,
    )
)
def test_whatever_the_clock_does_passes_come_back_in_their_order_each_with_what_it_read(steps):
    """Times stand still and go back to seconds that were used; values change on the way."""
    told, at = [], NOON
    for number, (step, value, what) in enumerate(steps):
        at += step
        found = [a_value("crc-errors", number // 2, "events")]
        if what == "lost":
            found.append(a_value(value=value))
        outcome = Outcome.ASLEEP if what == "asleep" else Outcome.READ
        table = (replace(ATTRIBUTE, failing=Failing.NOW if value else None),)
        told.append(replace(a_pass(at, *found, outcome=outcome, attributes=table), took_ms=number))
    with History.in_memory() as history:
        known = history.admit(a_drive(), a_place(), NOON)
        for pass_ in told:
            history.record(a_round(a_part(known, pass_), at=pass_.at))
        back = list(passes_with_readings(history._db.conn, 1, None))
        assert [_shown(one) for _, one in back] == [_shown(one) for one in told]
        with history._writing() as connection:
            file_past_days(connection, NOON // DAY + 9)
            assert list(passes_with_readings(connection, 1, None)) == back


def _shown(pass_: Pass) -> object:
    failing = pass_.reading and [one.failing for one in pass_.reading.attributes if one.failing]
    values = pass_.reading and sorted((one.signal, one.value) for one in pass_.reading.values)
    return pass_.at, pass_.took_ms, pass_.outcome, values, failing
