from dataclasses import replace

from diskwatch.records import LastPass, Outcome, PassDay
from diskwatch.ticket.watching import watching_part
from tests.samples import DAY
from tests.ticket.test_cautions import LINE


def _day(day, outcome=Outcome.READ, passes=48):
    return PassDay(day=day, outcome=outcome, passes=passes, first=day * DAY + 60, last=(day + 1) * DAY - 60)


def _told(*days, now):
    line = replace(LINE, last_pass=LastPass(at=now, outcome=Outcome.READ, explanation=None))
    told = watching_part(line, days, now).value
    assert isinstance(told, dict)
    return told


def test_passes_are_counted_by_outcome():
    told = _told(_day(10), _day(11), _day(11, Outcome.ASLEEP, 3), now=12 * DAY)
    assert told["passes"] == 99
    assert {one["outcome"]: one["passes"] for one in told["passes_by_outcome"] if one["passes"]} == {
        "read": 96,
        "asleep": 3,
    }
    assert (told["days_read"], told["gaps"]) == (2, [])


def test_days_without_a_reading_are_a_gap_also_where_it_was_asked_in_vain():
    told = _told(_day(10), _day(12, Outcome.TIMED_OUT, 5), _day(14), now=20 * DAY)
    assert told["gaps"] == [
        {"from": "1970-01-11T23:59:00Z", "until": "1970-01-15T00:01:00Z", "passes_without_reading": 5},
        {"from": "1970-01-15T23:59:00Z", "until": "1970-01-21T00:00:00Z", "passes_without_reading": 0},
    ]


def test_a_drive_that_was_never_read_has_no_gaps_but_no_reading_either():
    told = _told(_day(10, Outcome.TIMED_OUT, 2), now=20 * DAY)
    assert (told["first_read"], told["last_read"], told["gaps"], told["days_read"]) == (None, None, [], 0)
