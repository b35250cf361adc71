import pytest
from hypothesis import given, strategies as st

from diskwatch.history import rows
from diskwatch.history.traffic import class_days, rollups, stored_days, uncondensed_day
from diskwatch.history.writer import History
from diskwatch.records import ClassDay, Direction, IoSpan
from tests.history.examples import DAY, NOON, a_drive, a_place, a_span

TODAY = NOON // DAY
EVER = 2**40


@pytest.fixture
def connection(history):
    history.admit(a_drive(), a_place(), NOON)
    history.admit(a_drive("INVENTED-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
    return history._db.conn


def _minutes(connection):
    return connection.execute("SELECT at, span_ms, reads FROM io_minute ORDER BY slot").fetchall()


@pytest.mark.parametrize(
    ("at", "seconds", "minute"),
    [
        (NOON, 10.0, -60),
        (NOON + 4, 10.0, -60),
        (NOON + 5, 10.0, 0),
        (NOON + 59, 10.0, 0),
        (NOON + 5, 11.0, -60),
    ],
)
def test_a_span_lies_in_the_minute_of_its_middle(history, connection, at, seconds, minute):
    history.add_traffic([a_span(1, at, seconds, reads=7)])
    assert _minutes(connection) == [(NOON + minute, round(seconds * 1000), 7)]


def test_a_span_reads_back_from_its_minute(history, connection):
    history.add_traffic([a_span(2, NOON, 9.75, reads=2**40, busy_ms=0)])
    row = connection.execute(
        "SELECT drive, at + 60, span_ms, reads, writes, read_bytes, write_bytes, read_ms,"
        " write_ms, busy_ms FROM io_minute"
    ).fetchone()
    assert rows.span(row) == a_span(2, NOON, 9.75, reads=2**40, busy_ms=0)


spans = st.builds(
    lambda drive, at, seconds, reads, ms: a_span(drive, at, seconds, reads=reads, read_ms=ms),
    st.integers(1, 2),
    st.integers(NOON, NOON + 1200),
    st.sampled_from([9.75, 10.0, 10.25, 301.0]),
    st.integers(0, 50),
    st.integers(0, 500),
)


@given(st.lists(spans, max_size=12), st.integers(0, 12))
def test_however_spans_are_committed_the_five_minutes_are_the_same(found, cut):
    def told(*parts: list[IoSpan]):
        with History.in_memory() as history:
            for number in (1, 2):
                history.admit(a_drive(f"INV-{number}"), a_place(), NOON)
            for part in parts:
                history.add_traffic(part)
            return rollups(history._db.conn, 0, EVER, None)

    once = told(found)
    assert once == told(found[:cut], found[cut:])
    assert sum(one.counts.reads for one in once) == sum(one.counts.reads for one in found)
    assert sum(one.covered_ms for one in once) == sum(round(one.seconds * 1000) for one in found)
    assert sum(one.spans for one in once) == len(found)


def test_a_rollup_holds_the_slowest_short_span_of_each_direction_and_whether_counting_began_anew(
    history, connection
):
    history.add_traffic(
        [
            a_span(1, NOON + 10, reads=100, read_ms=200, writes=0, write_ms=0),
            a_span(1, NOON + 20, reads=10, read_ms=900, writes=0, write_ms=0),
        ]
    )
    (one,) = rollups(connection, 0, EVER, 1)
    assert (one.longest_read_us, one.longest_write_us, one.spans, one.reset) == (90_000, None, 2, False)
    assert (one.at, one.wall_seconds) == (NOON + 300, 300)
    history.add_traffic([IoSpan(drive=1, at=NOON + 30, seconds=10.0, counts=one.counts, reset=True)])
    assert rollups(connection, 0, EVER, 1)[0].reset


def test_rollups_are_those_that_begin_within_the_time_and_of_the_drive(history, connection):
    history.add_traffic([a_span(drive, NOON + 300 * number + 10) for number in range(4) for drive in (1, 2)])
    found = rollups(connection, NOON + 300, NOON + 900, 2)
    assert [(one.drive, one.at) for one in found] == [(2, NOON + 600), (2, NOON + 900)]
    assert len(rollups(connection, NOON + 300, NOON + 900, None)) == 4


def test_days_with_traffic_are_told_newest_first(history, connection):
    history.add_traffic([a_span(1, NOON + DAY * number) for number in (0, 2, 5)])
    for table in ("io_minute", "io_five"):
        assert list(stored_days(connection, table)) == [TODAY + 5, TODAY + 2, TODAY]


def _a_class(rollup_count: int) -> ClassDay:
    return ClassDay(
        load_class=7,
        direction=Direction.WRITE,
        rollups=rollup_count,
        operations=2**40,
        histogram={-160: 1, 90: 287},
    )


def test_a_day_is_condensed_once_it_is_over_and_reads_back(history, connection):
    history.add_traffic([a_span(1, NOON), a_span(1, NOON + DAY)])
    midnight = (TODAY + 1) * DAY
    assert uncondensed_day(connection, midnight + 3_599) is None
    assert history.uncondensed(midnight + 3_600) == (TODAY, rollups(connection, 0, midnight, None))
    history.condense(TODAY, {1: [_a_class(3)], 2: []})
    assert class_days(connection, 1, TODAY, TODAY + 1) == ((TODAY, _a_class(3)),)
    assert uncondensed_day(connection, midnight + 3_600) is None
    assert uncondensed_day(connection, midnight + 2 * DAY) == TODAY + 1


def test_a_day_that_is_lived_twice_is_condensed_anew_and_counted_once(history, connection):
    history.add_traffic([a_span(1, NOON + DAY * number) for number in range(3)])
    for number in range(3):
        history.condense(TODAY + number, {1: [_a_class(3)]})
    history.add_traffic([a_span(1, NOON + DAY + 600)])
    assert uncondensed_day(connection, NOON + 9 * DAY) == TODAY + 1
    history.condense(TODAY + 1, {1: [_a_class(4)]})
    assert class_days(connection, 1, TODAY + 1, TODAY + 2) == ((TODAY + 1, _a_class(4)),)


def test_a_clock_a_year_ahead_keeps_no_later_day_from_being_condensed(history, connection):
    history.add_traffic([a_span(1, NOON + 365 * DAY)])
    history.condense(TODAY + 365, {})
    history.add_traffic([a_span(1, NOON)])
    assert uncondensed_day(connection, NOON + DAY) == TODAY
