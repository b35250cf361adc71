from dataclasses import replace

import pytest

from diskwatch.machine.probe import Brought
from diskwatch.records import CallWord, DriveRound, Kind, KnownDrive, Outcome
from diskwatch.service.probing import DISK_MS, Probing
from tests.history.examples import a_call
from tests.samples import DAY, HDD, HERE, NOON, SSD, missed, read
from tests.service.machines import found

WHOLE = Brought(place=4096, band_us=(5_500,) * 256, slice_us=(2_000,) * 100, disk_ms=1_650)
AT_WORK = Brought(dropped="it was at work.")
DISTURBED = Brought(place=4096, band_us=(5_500,) * 32, disk_ms=360, dropped="somebody else came to use it.")


class ScriptedProber:
    def __init__(self):
        self.asked, self.brings = [], [WHOLE]

    def probe(self, found, wanted):
        self.asked.append((found.place.device, wanted.disk_ms))
        return self.brings.pop(0) if len(self.brings) > 1 else self.brings[0]

    def stop(self):
        self.brings = [AT_WORK]


def part(number=1, drive=HDD, *, at=NOON, call=CallWord.KEEP, outcome=None):
    pass_ = missed(at, outcome, drive) if outcome else read(at, drive)
    known = KnownDrive(number=number, drive=drive, place=HERE, first_seen=NOON)
    return DriveRound(known=known, pass_=pass_, state=None, call=replace(a_call(), word=call) if call else None)


class Day:
    """Probes of a machine, with what was kept of them, over restarts."""

    def __init__(self):
        self.prober, self.kept, self.battery, self.used = ScriptedProber(), [], False, []
        self.readable, self.book = True, []
        self.restart()

    def restart(self):
        self.probing = Probing(
            self.prober,
            past=lambda number, after: (
                [one for who, one in self.kept if who == number and one.at > after] if self.readable else None
            ),
            on_battery=lambda: self.battery,
            ours=lambda number, so: self.used.append((number, so)),
            note=self.book.append,
        )

    def round(self, *parts, at=NOON, testing=()):
        """A round, and the pass that takes in what waits; gives what was taken in."""
        there = {1: found(HDD), 2: found(HDD, device="/dev/sdb")}
        ready = self.probing.after(parts, there, now=lambda: at, testing=testing)
        taken = [(number, self.probing.take(number)) for number in sorted(ready)]
        self.kept += taken
        return [number for number, _ in taken]


@pytest.fixture
def day():
    return Day()


def test_a_disk_that_answered_is_probed_once_a_day_also_over_a_restart(day):
    assert day.round(part()) == [1]
    assert day.used == [(1, True), (1, True)]
    (number, kept), *_ = day.kept
    assert (number, len(kept.band_us), kept.disk_ms, kept.at) == (1, 256, 1_650, NOON)
    assert day.round(part(at=NOON + 60), at=NOON + 60) == []
    day.restart()
    assert day.round(part(at=NOON + 90), at=NOON + 90) == []
    assert day.round(part(at=NOON + DAY), at=NOON + DAY) == [1]
    assert day.prober.asked == [("/dev/sda", DISK_MS)] * 2


def test_what_was_probed_is_taken_in_once(day):
    day.round(part())
    assert day.probing.take(1) is None


@pytest.mark.parametrize(
    "one",
    [
        part(outcome=Outcome.ASLEEP),
        part(outcome=Outcome.TIMED_OUT),
        part(call=CallWord.COPY),
        part(call=CallWord.RETIRE),
        part(call=None),
        part(drive=SSD),
        part(drive=replace(HDD, kind=Kind.VIRTUAL)),
        part(drive=replace(HDD, rotation_rpm=None)),
        part(at=NOON - 121),
        part(at=NOON + 5),
        part(number=3),
    ],
    ids=lambda one: f"{one.pass_.outcome} {one.call and one.call.word} {one.known.drive.kind} {one.pass_.at}",
)
def test_a_drive_that_may_sleep_is_in_trouble_or_does_not_turn_is_never_probed(day, one):
    assert day.round(one) == []
    assert day.prober.asked == []


def test_nothing_is_probed_on_battery_during_a_self_test_or_while_the_past_cannot_be_read(day):
    day.battery = True
    assert day.round(part()) == []
    day.battery = False
    assert day.round(part(), testing={1}) == []
    day.readable = False
    assert day.round(part()) == []
    assert day.prober.asked == []
    day.readable = True
    assert day.round(part()) == [1]


def test_a_disk_at_work_is_tried_again_later_and_keeps_no_other_from_its_turn(day):
    day.prober.brings = [AT_WORK, AT_WORK, WHOLE]
    assert day.round(part()) == []
    assert day.round(part(), part(2)) == [1], "the other one waited longer, and was at work too"
    assert [device for device, _ in day.prober.asked] == ["/dev/sda", "/dev/sdb", "/dev/sda"]
    assert day.used[:4] == [(1, True), (1, False), (2, True), (2, False)]
    assert day.used[4:] == [(1, True), (1, True)]


def test_why_a_disk_cannot_be_probed_is_told_once_and_that_it_was_at_work_never(day):
    locked = Brought(dropped="it could not be opened for reading: Permission denied.")
    day.prober.brings = [AT_WORK, locked, locked, WHOLE]
    for _ in range(3):
        assert day.round(part()) == []
    assert [(one.drive, one.kind, one.text) for one in day.book] == [
        (1, "probe", "It was not probed: it could not be opened for reading: Permission denied.")
    ]
    assert day.round(part()) == [1]


def test_one_disk_is_probed_in_a_round(day):
    assert day.round(part(), part(2)) == [1]
    assert day.round(part(), part(2)) == [2]
    assert day.round(part(), part(2)) == []


def test_what_disturbed_probes_used_up_counts_also_over_a_restart(day):
    day.prober.brings = [DISTURBED]
    for _ in range(2):
        assert day.round(part()) == [1]
    day.restart()
    assert day.round(part()) == [1]
    assert day.round(part()) == []
    assert [budget for _, budget in day.prober.asked] == [2_000, 1_640, 1_280]
    assert [one.band_us for _, one in day.kept] == [(), (), ()], "too few reads to be judged"
    assert day.round(part(at=NOON + DAY), at=NOON + DAY) == [1]


def test_a_read_that_failed_is_kept_however_few_reads_there_were(day):
    day.prober.brings = [Brought(place=0, band_us=(5_000, None), disk_ms=7_000, dropped="a read of it failed.")]
    day.round(part())
    assert day.kept[0][1].band_us == (5_000, None)
    assert day.round(part()) == []
