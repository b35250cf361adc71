from dataclasses import replace

import pytest

from diskwatch.records import CallWord, DriveRound, Kind, KnownDrive, Outcome, SelfTest
from diskwatch.service.self_tests import GIVEN_UP, SelfTests
from diskwatch.settings import Duration, SelfTests as Wanted
from tests.history.examples import a_call
from tests.samples import DAY, HDD, HERE, NOON, SSD, missed, read
from tests.service.machines import found

NIGHT, MIDDAY = 3, 12
PASSED = SelfTest(name="Short offline", result="Completed without error", extended=False, passed=True, hours=9)
FAILED = SelfTest(
    name="Short offline",
    result="Completed: read failure",
    extended=False,
    passed=False,
    unreadable=True,
    hours=10,
    lba=4096,
)


class ScriptedTester:
    def __init__(self):
        self.begun, self.refusal = [], None

    def begin_test(self, found, *, extended):
        self.begun.append((found.place.device, extended))
        return self.refusal


def part(number=1, drive=HDD, *, at=NOON, call=CallWord.KEEP, tests=(), outcome=None):
    pass_ = missed(at, outcome, drive) if outcome else read(at, drive, self_tests=tuple(tests))
    known = KnownDrive(number=number, drive=drive, place=HERE, first_seen=NOON)
    return DriveRound(known=known, pass_=pass_, state=None, call=replace(a_call(), word=call) if call else None)


class Night:
    """Self-tests with what they told, over restarts."""

    def __init__(self, **wanted):
        self.tester, self.book, self.battery = ScriptedTester(), [], False
        self.wanted = Wanted(**{name: Duration(days * DAY) for name, days in wanted.items()})
        self.restart()

    def restart(self):
        self.tests = SelfTests(
            self.tester,
            self.wanted,
            past=lambda: list(self.book),
            note=self.book.append,
            on_battery=lambda: self.battery,
        )

    def round(self, *parts, at=NOON, hour=NIGHT):
        self.tests.after(parts, {1: found(HDD), 2: found(SSD)}, at=at, hour=hour)
        return [entry.text for entry in self.book]


def test_nothing_is_begun_that_the_owner_did_not_ask_for():
    night = Night()
    assert night.round(part()) == []
    assert night.tester.begun == []


def test_a_test_is_begun_at_night_followed_and_told_with_its_result():
    night = Night(short=30)
    assert night.round(part(), hour=MIDDAY) == []
    assert night.round(part()) == ["A short self-test of it began."]
    assert night.round(part(), at=NOON + 60)[1:] == []
    told = night.round(part(tests=[FAILED]), at=NOON + 120)
    assert told[-1] == "The short self-test of it ended: Completed: read failure at block 4,096."
    assert night.book[-1].data["lba"] == 4096
    assert len(night.round(part(tests=[FAILED]), at=NOON + 180)) == 2


def test_it_is_begun_again_only_when_its_time_has_come_also_after_a_restart():
    night = Night(short=30)
    night.round(part())
    night.round(part(tests=[PASSED]), at=NOON + 60)
    night.restart()
    night.round(part(tests=[PASSED]), at=NOON + 29 * DAY)
    assert len(night.tester.begun) == 1
    night.round(part(tests=[PASSED]), at=NOON + 30 * DAY)
    assert len(night.tester.begun) == 2


def test_a_test_under_way_is_followed_over_a_restart():
    night = Night(short=30)
    night.round(part())
    night.restart()
    assert night.round(part(tests=[PASSED]), at=NOON + 60)[-1].startswith("The short self-test of it ended")


def test_one_drive_is_tested_at_a_time():
    night = Night(short=30)
    night.round(part(1), part(2, SSD))
    night.round(part(1), part(2, SSD), at=NOON + 60)
    assert len(night.tester.begun) == 1
    night.round(part(1, tests=[PASSED]), part(2, SSD), at=NOON + 120)
    assert [device for device, _ in night.tester.begun] == ["/dev/sda", "/dev/sdb"]


def test_the_extended_test_comes_first():
    night = Night(short=30, long=90)
    night.round(part())
    assert night.tester.begun == [("/dev/sda", True)]


@pytest.mark.parametrize(
    "one",
    [
        part(call=CallWord.COPY),
        part(call=CallWord.RETIRE),
        part(call=None),
        part(outcome=Outcome.ASLEEP),
        part(outcome=Outcome.TIMED_OUT),
        part(drive=replace(HDD, kind=Kind.VIRTUAL)),
    ],
    ids=["copy", "retire", "not read", "asleep", "silent", "virtual"],
)
def test_no_test_is_begun_on_a_drive_that_should_rest_or_be_copied(one):
    night = Night(short=30, long=90)
    night.round(one)
    assert night.tester.begun == []


def test_no_test_is_begun_on_battery():
    night = Night(short=30)
    night.battery = True
    night.round(part())
    assert night.tester.begun == []


def test_a_drive_that_refuses_is_asked_again_when_the_next_one_is_due():
    night = Night(short=30)
    night.tester.refusal = "it has no self-tests."
    assert night.round(part()) == ["No short self-test of it: it has no self-tests."]
    night.round(part(), at=NOON + DAY)
    assert len(night.tester.begun) == 1
    night.round(part(), at=NOON + 31 * DAY)
    assert len(night.tester.begun) == 2


def test_a_test_that_shows_no_result_is_given_up():
    night = Night(short=30)
    night.round(part())
    told = night.round(part(), at=NOON + GIVEN_UP["short"])
    assert "no longer waited for" in told[1]


def test_a_test_that_is_still_running_has_no_result():
    running = replace(PASSED, result="Self-test routine in progress 90% remaining", passed=None)
    night = Night(short=30)
    night.round(part())
    assert len(night.round(part(tests=[running]), at=NOON + 60)) == 1


def test_nothing_is_begun_while_nobody_knows_what_was():
    night = Night(short=30)
    night.tests = SelfTests(
        night.tester, night.wanted, past=lambda: None, note=night.book.append, on_battery=lambda: False
    )
    night.round(part())
    assert night.tester.begun == []
