import pytest

from diskwatch.records import ClassDay, Direction, IoCounts, IoRollup
from diskwatch.ticket.latency import LEAST, condensed, latency_part
from diskwatch.trends.histogram import histogram


def _days(first, milliseconds, *, stretches=LEAST, load_class=7, direction=Direction.READ):
    return tuple(
        (
            first + day,
            ClassDay(
                load_class=load_class,
                direction=direction,
                rollups=stretches,
                operations=100,
                histogram=histogram([milliseconds] * stretches),
            ),
        )
        for day in range(3)
    )


def _only(part):
    assert isinstance(part.value, list)
    (told,) = part.value
    return told


def test_reads_that_take_twice_as_long_at_equal_load_are_told_so():
    told = _only(latency_part(_days(100, 5.0), _days(200, 10.0)))
    assert told["direction"] == "read"
    assert told["times_as_long"] == pytest.approx(2, rel=0.05)
    assert told["then"] == {"from": "1970-04-11T00:00:00Z", "until": "1970-04-14T00:00:00Z"}


def test_a_busier_disk_is_no_slower_one():
    then = _days(100, 5.0, load_class=7)
    now = (*_days(200, 5.0, load_class=7), *_days(200, 50.0, load_class=90))
    told = _only(latency_part(then, now))
    assert told["times_as_long"] == pytest.approx(1, rel=0.05)
    assert [one["load_class"] for one in told["classes"]] == [7]


def test_traffic_that_nobody_has_condensed_yet_is_condensed_by_day():
    counts = IoCounts(
        reads=600, writes=0, read_bytes=600 * 4096, write_bytes=0, read_ms=3_000, write_ms=0, busy_ms=900
    )
    rollups = [
        IoRollup(
            drive=1,
            at=at,
            wall_seconds=300,
            covered_ms=300_000,
            counts=counts,
            longest_read_us=None,
            longest_write_us=None,
            spans=30,
            reset=False,
        )
        for at in (86_400 - 300, 86_400, 86_400 + 300)
    ]
    told = condensed(rollups)
    assert [(day, one.rollups, one.direction) for day, one in told] == [
        (0, 2, Direction.READ),
        (1, 1, Direction.READ),
    ]


@pytest.mark.parametrize(
    ("then", "now"),
    [
        ((), ()),
        (_days(100, 5.0, load_class=1), _days(200, 5.0, load_class=2)),
        (_days(100, 5.0, stretches=1), _days(200, 5.0)),
        (_days(100, 5.0), _days(200, 5.0, direction=Direction.WRITE)),
    ],
)
def test_where_nothing_can_be_compared_the_reason_is_told(then, now):
    part = latency_part(then, now)
    assert part.value is None
    assert part.reason
