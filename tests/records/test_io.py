from diskwatch.records import Direction, IoCounts, IoRollup


def rollup(reads: int, writes: int) -> IoRollup:
    return IoRollup(
        drive=1,
        at=300,
        wall_seconds=300,
        covered_ms=300_000,
        counts=IoCounts(
            reads=reads, writes=writes, read_bytes=10, write_bytes=20, read_ms=7, write_ms=9, busy_ms=5
        ),
        longest_read_us=None,
        longest_write_us=None,
        spans=30,
        reset=False,
    )


def test_a_rollup_tells_each_direction_by_itself():
    one = rollup(2, 3)
    assert [one.operations(way) for way in Direction] == [2, 3]
    assert [one.moved(way) for way in Direction] == [10, 20]
    assert [one.mean_ms(way) for way in Direction] == [3.5, 3.0]


def test_where_nothing_was_done_no_time_is_known():
    assert [rollup(0, 0).mean_ms(way) for way in Direction] == [None, None]
