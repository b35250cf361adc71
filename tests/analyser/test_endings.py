from diskwatch.judge.rules import COOL
from diskwatch.records import CallWord
from diskwatch.trends.temperature import THRESHOLD
from tests.analyser.lives import kinds, lived
from tests.samples import DAY, NOON, read


def test_a_link_finding_ends_after_thirty_powered_days_without_a_damaged_transfer():
    loose = [read(NOON + day * DAY, crc_errors=min(day, 30) // 10) for day in range(75)]
    steps = lived(*loose)
    assert steps[30].call.word is CallWord.LOOK
    assert steps[59].call.word is CallWord.LOOK
    assert steps[60].call.word is CallWord.KEEP
    assert kinds(steps[60]) == ["ended", "call"]
    assert steps[60].evidence["crc-errors"] < 10
    assert all(step.call.word is CallWord.KEEP for step in steps[60:])


def test_calendar_days_on_which_the_drive_lay_unpowered_do_not_count():
    loose = [read(NOON + day * DAY, crc_errors=day // 10, power_on_hours=day * 24) for day in range(31)]
    resting = read(NOON + 300 * DAY, crc_errors=3, power_on_hours=30 * 24 + 5)
    assert lived(*loose, resting)[-1].call.word is CallWord.LOOK


def rewritten(days, **more):
    return [
        read(NOON, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, pending_sectors=2, reallocated_sectors=0),
        read(NOON + 5 * DAY, pending_sectors=0, reallocated_sectors=0, **more),
        read(NOON + days * DAY, pending_sectors=0, reallocated_sectors=0, **more),
    ]


def test_a_rewritten_sector_ends_after_ninety_days_without_a_new_defect():
    assert lived(*rewritten(90))[-1].call.word is CallWord.LOOK
    assert lived(*rewritten(91))[-1].call.word is CallWord.KEEP


def test_a_sector_that_still_waits_never_ends_by_itself():
    waiting = [read(NOON + day * DAY, pending_sectors=1 if day else 0) for day in range(400)]
    assert lived(*waiting)[-1].call.word is CallWord.LOOK


def test_a_sector_that_was_replaced_never_ends_by_itself():
    replaced = [
        read(NOON + day * DAY, pending_sectors=0, reallocated_sectors=1 if day else 0) for day in range(400)
    ]
    assert lived(*replaced)[-1].call.word is CallWord.LOOK


def test_the_odds_rule_stands_until_the_owner_speaks():
    worse = [
        read(NOON, pending_sectors=0, reallocated_sectors=0),
        read(NOON + DAY, pending_sectors=40, reallocated_sectors=40),
        *(read(NOON + day * DAY, pending_sectors=0, reallocated_sectors=40) for day in range(2, 400)),
    ]
    assert lived(*worse)[-1].call.word is CallWord.COPY


def warm(*celsius):
    return [read(NOON + day * DAY, temperature=one, crc_errors=0) for day, one in enumerate(celsius)]


def test_running_hot_ends_two_weeks_after_its_evidence_left_the_threshold_once_none_is_left():
    steps = lived(*warm(*[35, 36] * 20, *[58] * 20, *[36] * 40))
    hot = [day for day, step in enumerate(steps) if "drift:temperature" in step.state.standing]
    alarmed = [day for day, step in enumerate(steps) if step.evidence.get("temperature", 0) >= THRESHOLD]
    assert hot == list(range(alarmed[0], alarmed[-1] + COOL))
    over = steps[hot[-1] + 1]
    assert kinds(over) == ["ended", "call"]
    assert over.call.word is CallWord.KEEP


def test_days_close_to_the_norm_do_not_end_it():
    steps = lived(*warm(*[35, 36] * 20, *[58] * 20, *[49] * 60))
    assert steps[-1].call.rule == "drift:temperature"


def test_a_drive_that_lay_unread_is_still_taken_for_hot():
    hot = warm(*[35, 36] * 20, *[58] * 20)
    later = read(NOON + 200 * DAY, temperature=36, crc_errors=0)
    assert lived(*hot, later)[-1].call.rule == "drift:temperature"
