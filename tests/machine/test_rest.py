from diskwatch.machine.endings import Verdict
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.rest import LONGEST, Rest
from diskwatch.records import Drive, Identity, Kind, Outcome, Place
from diskwatch.units import DAY

SILENT = Verdict(outcome=Outcome.ASLEEP, explanation="It is asleep.", unproved=True)
STANDBY = Verdict(outcome=Outcome.ASLEEP, explanation="It is asleep.")
READ = Verdict(outcome=Outcome.READ)
AT = 5_000.0


def drive(instance: str = "1") -> Found:
    return Found(
        address=Address(node="/dev/sdx", type="sat"),
        blocks=("sdx",),
        place=Place(device="/dev/sdx"),
        drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path="/dev/sdx"), kind=Kind.HDD),
        instance=instance,
    )


def after(
    rest: Rest, verdict: Verdict, count: int | None, at: float, *, moved: int = 0, instance: str = "1"
) -> Verdict:
    later = None if count is None else count + moved
    return rest.judged(drive(instance), verdict, before=count, after=later, at=at)


def test_a_silent_drive_is_asleep_with_a_doubt():
    rest = Rest()
    after(rest, READ, 7, AT)
    found = after(rest, SILENT, 7, AT + 1800)
    assert found.outcome is Outcome.ASLEEP
    assert "cable" in (found.explanation or "")


def test_a_drive_that_works_between_the_questions_and_sleeps_at_each_is_never_accused():
    rest = Rest()
    after(rest, READ, 7, AT)
    for half_hour in range(1, 9):
        assert after(rest, SILENT, 7 + 50 * half_hour, AT + 1800 * half_hour).outcome is Outcome.ASLEEP


def test_a_silent_drive_that_works_while_it_is_asked_twice_in_a_row_does_not_sleep():
    rest = Rest()
    after(rest, READ, 7, AT)
    assert after(rest, SILENT, 7, AT + 1800, moved=2).outcome is Outcome.ASLEEP
    found = after(rest, SILENT, 9, AT + 3600, moved=1)
    assert found.outcome is Outcome.GARBLED
    assert "worked while it was asked" in (found.explanation or "")


def test_one_question_at_which_something_woke_it_proves_nothing():
    rest = Rest()
    assert after(rest, SILENT, 7, AT, moved=2).outcome is Outcome.ASLEEP
    assert after(rest, SILENT, 9, AT + 1800).outcome is Outcome.ASLEEP
    assert after(rest, SILENT, 9, AT + 3600, moved=2).outcome is Outcome.ASLEEP
    assert after(rest, READ, 11, AT + 5400, moved=2) is READ
    assert after(rest, SILENT, 13, AT + 7200, moved=2).outcome is Outcome.ASLEEP


def test_a_drive_that_says_that_it_is_in_standby_is_believed_whatever_was_moved():
    rest = Rest()
    assert [after(rest, STANDBY, 7, AT + day, moved=2) for day in range(3)] == [STANDBY] * 3


def test_counts_of_another_device_or_none_at_all_prove_nothing():
    rest = Rest()
    after(rest, SILENT, 7, AT, moved=1)
    assert after(rest, SILENT, 8, AT + 1800, moved=1, instance="2").outcome is Outcome.ASLEEP
    assert after(rest, SILENT, None, AT + 3600, instance="2").outcome is Outcome.ASLEEP
    assert after(rest, SILENT, 9, AT + 5400, moved=1, instance="2").outcome is Outcome.ASLEEP


def test_no_drive_sleeps_for_ever_unheard():
    rest = Rest()
    for day in range(LONGEST // DAY):
        assert after(rest, SILENT, 7, AT + day * DAY).outcome is Outcome.ASLEEP
    late = after(rest, SILENT, 7, AT + LONGEST)
    assert late.outcome is Outcome.GARBLED
    assert "8 days" in (late.explanation or "")
    assert after(rest, READ, 7, AT + LONGEST + 60) is READ
    assert after(rest, SILENT, 7, AT + LONGEST + 120).outcome is Outcome.ASLEEP
