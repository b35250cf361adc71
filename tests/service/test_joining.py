from dataclasses import replace

import pytest

from diskwatch import analyser
from diskwatch.history.writer import History
from diskwatch.records import (
    KERNEL_LOG,
    CallWord,
    DriveRound,
    Entry,
    LeftOff,
    Listened,
    Place,
    Round,
    SignalKind,
    Value,
)
from diskwatch.service.joining import LAST_SECTOR, join, strangers
from diskwatch.service.waiting import Notes, Traffic
from tests.history.examples import a_span
from tests.samples import DAY, HDD, HERE, NOON, NVME, SSD, read

THERE = Place(device="/dev/sdb", bay="ata-9")
LATER = NOON + 40 * DAY


def part(known, pass_, state):
    step = analyser.advance(state, pass_)
    return DriveRound(
        known=known,
        pass_=pass_,
        state=analyser.dump(step.state),
        findings=step.findings,
        evidence=step.evidence,
        call=step.call,
    )


@pytest.fixture
def history():
    """A hard disk with a pending sector that came on the third day, and a solid-state drive."""
    with History.in_memory() as found:
        hdd, ssd = found.admit(HDD, HERE, NOON), found.admit(SSD, THERE, NOON)
        states = {hdd.number: analyser.start(), ssd.number: analyser.start()}
        for day in range(5):
            at = NOON + day * DAY
            parts = (
                part(hdd, read(at, HDD, pending_sectors=int(day > 2)), states[hdd.number]),
                part(ssd, read(at, SSD), states[ssd.number]),
            )
            found.record(Round(at=at, drives=parts))
            states = {one.known.number: analyser.load(one.state) for one in parts}
        totals = {hdd.number: {"kernel-io-errors": 40, LAST_SECTOR: 7}}
        left_off = LeftOff(log="boot 1", sequence=100)
        found.listen(Listened(source="kmsg", left_off=left_off, gathered="kept", totals=totals))
        yield found


@pytest.fixture
def here(history):
    """The same drives as a watch counts them that has no history: in another order, with one more."""
    hdd, ssd = history.known()
    return {
        1: replace(ssd, number=1, first_seen=LATER),
        2: replace(hdd, number=2, first_seen=LATER),
        3: replace(hdd, number=3, first_seen=LATER, drive=NVME),
    }


def heard(count, signal="kernel-io-errors"):
    return Value(signal=signal, value=count, unit="events", kind=SignalKind.COUNT, source=KERNEL_LOG)


def test_drives_are_recognised_and_those_that_are_new_get_numbers_of_their_own(history, here):
    joined = join(history, here, ())
    assert {number: known.drive for number, known in joined.known.items()} == {1: HDD, 2: SSD, 3: NVME}
    assert joined.known[1].first_seen == NOON
    assert joined.states == history.states()


def test_a_pass_that_was_judged_as_a_new_drives_is_judged_again_by_its_past(history, here):
    pass_ = read(LATER, HDD, pending_sectors=1)
    first = Entry(at=LATER, drive=2, kind="first-seen", text="First seen.")
    other = Entry(at=LATER, drive=3, kind="first-seen", text="First seen.")
    blind = part(here[2], pass_, analyser.start())
    assert blind.call is not None
    assert blind.call.word is CallWord.KEEP
    new = part(here[3], read(LATER, NVME), analyser.start())
    joined = join(history, here, [Round(at=LATER, drives=(blind, new), entries=(first, other))])
    (written,) = joined.writes
    assert isinstance(written, Round)
    again, untouched = written.drives
    wanted = analyser.advance(analyser.load(history.states()[1]), pass_)
    assert (again.known.number, again.call, again.state) == (1, wanted.call, analyser.dump(wanted.state))
    assert again.call is not None
    assert again.call.word is CallWord.LOOK
    assert joined.states[1] == again.state
    assert untouched == replace(new, known=untouched.known)
    assert joined.states[3] == new.state
    # A drive that was known is not seen for the first time.
    assert [entry.drive for entry in written.entries if entry.kind == "first-seen"] == [3]
    history.record(written)


def test_traffic_and_lines_of_the_day_book_follow_their_drive(history, here):
    line = Entry(at=LATER, drive=1, kind="watch", text="Said.")
    whole = Entry(at=LATER, drive=None, kind="watch", text="Said of all.")
    traffic, notes = join(history, here, [Traffic(spans=(a_span(2),)), Notes(entries=(line, whole))]).writes
    assert isinstance(traffic, Traffic)
    assert isinstance(notes, Notes)
    assert [span.drive for span in traffic.spans] == [1]
    assert [entry.drive for entry in notes.entries] == [2, None]


def test_what_was_heard_is_counted_on_from_what_was_heard_before(history, here):
    listened = Listened(
        source="kmsg",
        left_off=LeftOff(log="boot 2", sequence=9),
        gathered="",
        totals={2: {"kernel-io-errors": 3, LAST_SECTOR: 5}},
        entries=(Entry(at=LATER, drive=2, kind="kernel", text="Heard."),),
    )
    blind = part(here[2], replace(read(LATER, HDD), heard=(heard(3),)), analyser.start())
    said, round_ = join(history, here, [listened, Round(at=LATER, drives=(blind,))]).writes
    assert isinstance(said, Listened)
    assert isinstance(round_, Round)
    assert said.totals == {1: {"kernel-io-errors": 43, LAST_SECTOR: 5}}
    assert [entry.drive for entry in said.entries] == [1]
    assert [one.value for one in round_.drives[0].pass_.heard] == [43]


def test_what_the_history_has_heard_already_is_not_counted_again(history, here):
    listened = Listened(
        source="kmsg",
        left_off=LeftOff(log="boot 1", sequence=100),
        gathered="",
        totals={2: {"kernel-io-errors": 40}},
        entries=(Entry(at=LATER, drive=2, kind="kernel", text="Heard again."),),
    )
    blind = part(here[2], replace(read(LATER, HDD), heard=(heard(40),)), analyser.start())
    said, round_ = join(history, here, [listened, Round(at=LATER, drives=(blind,))]).writes
    assert isinstance(said, Listened)
    assert isinstance(round_, Round)
    assert (said.totals, said.entries, said.gathered) == ({}, (), "kept")
    assert [one.value for one in round_.drives[0].pass_.heard] == [40]


def test_a_number_that_means_another_drive_makes_strangers(history, here):
    there = {one.number: one for one in history.known()}
    assert strangers(there, here)
    assert not strangers(there, there)
    assert not strangers(there, {3: here[3]})
