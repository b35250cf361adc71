from diskwatch.history.latency import learnt, traffic_days, write_learnt
from diskwatch.records import IoCounts, IoSpan, Learnt
from tests.history.examples import DAY, NOON, a_drive, a_place

MIDNIGHT = NOON // DAY * DAY
TODAY = NOON // DAY


def a_span(drive, at):
    counts = IoCounts(
        reads=10, writes=2, read_bytes=40_960, write_bytes=8_192, read_ms=50, write_ms=4, busy_ms=40
    )
    return IoSpan(drive=drive, at=at, seconds=10.0, counts=counts)


def busy(history):
    """Two drives, of which the first works on every third day."""
    history.admit(a_drive(), a_place(), NOON)
    history.admit(a_drive("INVENTED-2", "/dev/sdb"), a_place("/dev/sdb"), NOON)
    for day in range(10):
        at = MIDNIGHT + day * DAY
        history.add_traffic([a_span(2, at + 5_000)])
        if day % 3 == 0:
            history.add_traffic([a_span(1, at + 300), a_span(1, at + 9_000), a_span(1, at + DAY - 20)])


def test_days_come_oldest_first_without_those_of_other_drives_and_empty_ones(history):
    busy(history)
    days = history.traffic_days(1, after=None, before=TODAY + 10, most=99)
    assert [day - TODAY for day, _ in days] == [0, 3, 6, 9]
    assert [len(rollups) for _, rollups in days] == [3, 3, 3, 3]
    assert {one.drive for _, rollups in days for one in rollups} == {1}
    assert all(one.at - 300 >= day * DAY for day, rollups in days for one in rollups)
    assert all(one.at <= (day + 1) * DAY for day, rollups in days for one in rollups)


def test_what_was_taken_in_and_what_is_not_over_is_left_out(history):
    busy(history)
    days = history.traffic_days(1, after=TODAY, before=TODAY + 9, most=99)
    assert [day - TODAY for day, _ in days] == [3, 6]
    assert [day - TODAY for day, _ in history.traffic_days(1, after=None, before=TODAY + 9, most=2)] == [0, 3]


def test_a_drive_without_traffic_has_no_days(history):
    history.admit(a_drive(), a_place(), NOON)
    assert traffic_days(history._db.conn, 1, after=None, before=TODAY + 9, most=9) == ()


def test_what_was_learnt_is_kept_once_and_comes_back_to_the_letter(history):
    history.admit(a_drive(), a_place(), NOON)
    assert history.learnt(1) is None
    write_learnt(history._db.conn, 1, Learnt(through=TODAY, state="{}"))
    write_learnt(history._db.conn, 1, Learnt(through=TODAY + 1, state='{"é": 0.1}'))
    assert learnt(history._db.conn, 1) == Learnt(through=TODAY + 1, state='{"é": 0.1}')
    assert history._db.conn.execute("SELECT count(*) FROM latency_state").fetchone() == (1,)
