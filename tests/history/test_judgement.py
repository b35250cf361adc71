from diskwatch.records import CallWord
from tests.history.examples import (
    DAY,
    NOON,
    a_call,
    a_drive,
    a_finding,
    a_place,
    a_value,
    keep,
)


def test_a_finding_opens_follows_its_sentence_closes_and_may_open_again(history, known, rows):
    story = [(a_finding(),), (a_finding(sentence="9 sectors"),), (), (a_finding(since=NOON + 3),)]
    for step, standing in enumerate(story):
        keep(history, known, NOON + step, findings=standing)
    assert rows("SELECT since, sentence, closed FROM finding ORDER BY number") == [
        (NOON, "9 sectors", NOON + 2),
        (NOON + 3, "8 sectors wait to be rewritten.", None),
    ]


def test_one_drives_findings_do_not_close_anothers(history, known, rows):
    other = history.admit(a_drive("INVENTED-2"), a_place("/dev/sdb"), NOON)
    keep(history, known, NOON, findings=(a_finding(),))
    keep(history, other, NOON + 1)
    assert rows("SELECT drive, closed FROM finding") == [(known.number, None)]


def test_only_a_change_of_call_makes_a_new_one(history, known):
    rows = history._db.conn.execute
    keep(history, known, NOON, call=a_call())
    keep(history, known, NOON + 1, call=a_call(reason="9 sectors", evidence=5000.0))
    assert rows("SELECT number, at, reason FROM call").fetchall() == [(1, NOON, "9 sectors")]
    keep(history, known, NOON + 2, call=a_call(CallWord.COPY, NOON + 2))
    keep(history, known, NOON + 3, call=None)
    assert rows("SELECT at, word FROM call").fetchall() == [(NOON, "look"), (NOON + 2, "copy")]


def test_a_clock_that_was_set_back_does_not_bring_an_old_call_back(history, known):
    keep(history, known, NOON, call=a_call())
    keep(history, known, NOON - 900, call=a_call(CallWord.RETIRE, NOON - 900))
    assert history.calls()[known.number].word is CallWord.RETIRE


def test_the_last_evidence_of_a_day_is_kept_for_each_day(history, known, rows):
    for at, days in [(NOON, 1.0), (NOON + 60, 2.0), (NOON + DAY, 3.0), (NOON + 3 * DAY, 4.0)]:
        keep(history, known, at, a_value(), evidence={"pending-sectors": days})
    today = NOON // DAY
    assert rows("SELECT day, evidence FROM evidence") == [(today, 2.0), (today + 1, 3.0)]
    assert rows("SELECT day, evidence FROM latest") == [(today + 3, 4.0)]


def test_evidence_of_what_no_drive_reports_is_kept_and_joins_its_values_later(history, known, rows):
    keep(history, known, NOON, evidence={"read-latency": 1.5})
    keep(history, known, NOON + 1, a_value("read-latency", 900, "microseconds"))
    assert rows("SELECT unit, value, since, evidence FROM series JOIN latest ON series = number") == [
        ("microseconds", 900, NOON + 1, 1.5)
    ]


def test_a_state_is_replaced_and_kept_where_a_pass_did_not_move_it(history, known):
    keep(history, known, NOON, state="one")
    keep(history, known, NOON + 1, state=None)
    assert history.states() == {known.number: "one"}
    keep(history, known, NOON + 2, state="two")
    assert history.states() == {known.number: "two"}


def test_the_state_at_the_end_of_every_week_is_kept_as_it_was(history, known):
    week = 7 * DAY
    monday = NOON // week * week
    for step, at in enumerate([monday, monday + DAY, monday + week, monday + week + 5, monday + 3 * week]):
        keep(history, known, at, a_value(value=step), state=f"state {step}")
    assert history.copies(known.number) == ((monday + DAY, "state 1"), (monday + week + 5, "state 3"))
