from diskwatch.machine.outcomes import Verdict
from diskwatch.machine.protocol import Address, Found
from diskwatch.machine.rest import LONGEST, Rest
from diskwatch.records import Drive, Identity, Kind, Outcome, Place
from diskwatch.units import DAY

SILENT = Verdict(outcome=Outcome.ASLEEP, explanation="It is asleep.", unproved=True)
STANDBY = Verdict(outcome=Outcome.ASLEEP, explanation="It is asleep.")
READ = Verdict(outcome=Outcome.READ)
AT = 1_800_000_000


def drive(instance: str = "1") -> Found:
    return Found(
        address=Address(node="/dev/sdx", type="sat"),
        blocks=("sdx",),
        place=Place(device="/dev/sdx"),
        drive=Drive(identity=Identity(wwn=None, model=None, serial=None, path="/dev/sdx"), kind=Kind.HDD),
        instance=instance,
    )


def after(rest: Rest, verdict: Verdict, count: int | None, at: int, *, instance: str = "1") -> Verdict:
    return rest.judged(drive(instance), verdict, before=count, after=count, at=at)


def test_a_silent_drive_that_was_not_used_since_it_was_last_asked_is_asleep_with_a_doubt():
    rest = Rest()
    after(rest, READ, 7, AT)
    found = after(rest, SILENT, 7, AT + 1800)
    assert found.outcome is Outcome.ASLEEP
    assert "cable" in (found.explanation or "")


def test_a_silent_drive_that_was_used_since_it_was_last_asked_does_not_sleep():
    rest = Rest()
    after(rest, READ, 7, AT)
    found = after(rest, SILENT, 8, AT + 1800)
    assert found.outcome is Outcome.GARBLED
    assert "in use" in (found.explanation or "")
    assert after(rest, SILENT, 8, AT + 3600).outcome is Outcome.ASLEEP


def test_a_drive_that_says_that_it_is_in_standby_is_believed_whatever_was_moved():
    rest = Rest()
    after(rest, READ, 7, AT)
    assert after(rest, STANDBY, 8, AT + 1800) is STANDBY


def test_what_the_question_itself_moved_does_not_count():
    rest = Rest()
    rest.judged(drive(), READ, before=7, after=9, at=AT)
    assert after(rest, SILENT, 9, AT + 1800).outcome is Outcome.ASLEEP


def test_counts_of_another_device_or_none_at_all_prove_nothing():
    rest = Rest()
    after(rest, READ, 7, AT)
    assert after(rest, SILENT, 8, AT + 1800, instance="2").outcome is Outcome.ASLEEP
    assert after(rest, SILENT, None, AT + 3600, instance="2").outcome is Outcome.ASLEEP
    assert after(rest, SILENT, 9, AT + 5400, instance="2").outcome is Outcome.ASLEEP


def test_no_drive_sleeps_for_ever_unheard():
    rest = Rest()
    for day in range(LONGEST // DAY):
        assert after(rest, SILENT, 7, AT + day * DAY).outcome is Outcome.ASLEEP
    late = after(rest, SILENT, 7, AT + LONGEST)
    assert late.outcome is Outcome.GARBLED
    assert "8 days" in (late.explanation or "")
    assert after(rest, READ, 7, AT + LONGEST + 60) is READ
    assert after(rest, SILENT, 7, AT + LONGEST + 120).outcome is Outcome.ASLEEP
