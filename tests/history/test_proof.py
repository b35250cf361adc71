from dataclasses import replace
from itertools import pairwise

from diskwatch.history import proof
from diskwatch.history.proof import Copy, Plugged
from diskwatch.records import Outcome, SignalKind
from tests.history.examples import DAY, NOON, a_drive, a_part, a_pass, a_place, a_round, a_value
from tests.history.years import upkept

WEEK = 7 * DAY


def _live(history, days, *, known=None, count=lambda day: day // 3, begin=NOON):
    """Two passes a day; a counter that rises now and then, and hours."""
    known = known or history.admit(a_drive(), a_place(), begin)
    for day in range(days):
        for half in (0, 6 * 3600):
            at = begin + day * DAY + half
            values = (
                a_value(value=count(day)),
                a_value("power-on-hours", 24 * day + half // 3600, "hours", SignalKind.TIME),
                a_value("temperature", 30 + half % 7, "celsius", SignalKind.GAUGE),
            )
            history.record(a_round(a_part(known, a_pass(at, *values), state=f"state of {at}"), at=at))
    return known


def test_a_counter_tells_its_first_value_and_every_change(history):
    _live(history, 10)
    pasts = {one.name: one for one in proof.signal_pasts(history._db.conn, 1)}
    assert pasts["pending-sectors"].first == (NOON, 0)
    assert pasts["pending-sectors"].changes == tuple((NOON + day * DAY, day // 3) for day in (0, 3, 6, 9))
    assert pasts["pending-sectors"].complete
    assert pasts["temperature"].first[1] == 30
    assert not pasts["temperature"].complete


def test_of_what_moves_all_the_time_only_the_beginning_is_read(history):
    _live(history, 40)
    (hours,) = [one for one in proof.signal_pasts(history._db.conn, 1) if one.name == "power-on-hours"]
    assert hours.changes[0] == (NOON, 0)
    assert hours.changes[-1][0] <= NOON + proof.BASELINE_DAYS * DAY


def test_every_place_is_told_in_order(history):
    known = history.admit(a_drive(), a_place(), NOON)
    moved = replace(known, place=a_place("/dev/sdb", "ata-2"))
    history.record(a_round(a_part(moved, a_pass(NOON + 60)), at=NOON + 60))
    assert proof.places(history._db.conn, 1) == (
        Plugged(since=NOON, device="/dev/sda", bay="ata-1"),
        Plugged(since=NOON + 60, device="/dev/sdb", bay="ata-2"),
    )


def test_every_copy_gives_the_state_of_its_date(history):
    _live(history, 22)
    copies = proof.copies(history._db.conn, 1)
    assert len(copies) == 3
    for copy in copies:
        assert proof.state_of(history._db.conn, 1, copy) == f"state of {copy.at}"
    assert proof.state_of(history._db.conn, 1, Copy(turn=0, at=NOON - 1)) is None


def _told(history, after):
    wanted = ("pending-sectors", "power-on-hours")
    passes = proof.followed(history._db.conn, 1, wanted, after)
    assert {one.outcome for one in passes} == {Outcome.READ}
    return [
        (one.at, *(one.reading.get(signal) for signal in wanted)) for one in passes if one.reading is not None
    ]


def test_readings_after_a_copy_are_those_that_were_taken_with_what_held_before(history):
    _live(history, 22)
    copy = proof.copies(history._db.conn, 1)[1]
    told = _told(history, copy)
    assert all(at > copy.at for at, _, _ in told)
    assert told == [
        (NOON + day * DAY + half, day // 3, 24 * day + half // 3600)
        for day in range(22)
        for half in (0, 6 * 3600)
        if NOON + day * DAY + half > copy.at
    ]


def test_of_thinned_days_the_moves_and_the_ends_stand_for_all(history):
    _live(history, 200)
    upkept(history, NOON + 200 * DAY)
    first = proof.copies(history._db.conn, 1)[0]
    told = _told(history, first)
    days = {at // DAY for at, _, _ in told}
    assert len(days) == len({NOON // DAY + day for day in range(200)} - set(range(first.at // DAY + 1)))
    moves = [count for (_, before, _), (_, count, _) in pairwise(told) if count != before]
    assert moves == [day // 3 for day in range(200) if day % 3 == 0 and NOON + day * DAY > told[0][0]]
