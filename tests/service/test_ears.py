import threading
import time

import pytest

from diskwatch.errors import DiskwatchError
from diskwatch.history.reader import Past
from diskwatch.machine.partitions import Piece
from diskwatch.machine.senses import RealSenses
from diskwatch.records import Round
from diskwatch.service import ears as room
from diskwatch.service.arrival import take_in
from diskwatch.service.ears import MOST_TOLD, Ears
from diskwatch.service.keeper import Keeper
from tests.history.examples import a_part, a_pass
from tests.samples import HDD, HERE, NOON, NVME
from tests.service.senses import ScriptedSenses

READ = "I/O error, dev {}, sector {} op 0x0:(READ) flags 0x0 phys_seg 1 prio class 2"
BLOCKS = {1: ("sda",), 2: ("nvme0n1",)}


class Listening:
    """Ears over a real history of two drives."""

    def __init__(self, folder, senses, **more):
        self.folder = folder
        self.keeper = Keeper(folder)
        if not self.keeper.known:
            parts = tuple(a_part(self.keeper.admit(drive, HERE, NOON), a_pass(NOON)) for drive in (HDD, NVME))
            self.keeper.record(Round(at=NOON, drives=parts))
        self.soon: list[int] = []
        self.ears = Ears(
            senses,
            self.keeper,
            lock=threading.Lock(),
            blocks=lambda: BLOCKS,
            now=lambda: NOON,
            soon=lambda: self.soon.append(1),
            **more,
        )
        self.ears.open()

    def counts(self, number):
        return {value.signal: value.value for value in self.ears.heard(number)}

    def end(self):
        self.ears.stop()
        self.keeper.close()

    def book(self):
        with Past.open(self.folder) as past:
            return [
                (entry.drive, entry.text) for entry in past.day_book() if entry.kind in {"kernel", "trouble"}
            ]


@pytest.fixture
def senses():
    return ScriptedSenses()


def test_an_event_reaches_the_day_book_and_the_counts_of_its_drive_alone(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.say(READ.format("sda", 2048))
    here.ears.once()
    assert here.ears.news == {1}
    assert here.counts(1) == {
        "kernel-io-errors": 1,
        "kernel-timeouts": 0,
        "last-unreadable-sector": 2048,
        "link-resets": 0,
        "unreadable-sectors": 1,
    }
    assert here.ears.news == set(), "a pass has taken it in"
    assert here.counts(2) == {"kernel-io-errors": 0, "kernel-timeouts": 0, "link-resets": 0}
    here.end()
    assert here.book() == [(1, "A read of sda failed at sector 2,048 (I/O).")]


def test_the_partition_that_a_sector_lies_in_is_told(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.pieces = {("sda", 2048): Piece(name="sda2", sector=48)}
    senses.say(READ.format("sda", 2048))
    here.ears.once()
    here.end()
    assert here.book() == [
        (1, "A read of sda failed at sector 2,048 (I/O). That is sector 48 of the partition sda2.")
    ]


def test_a_restart_hears_nothing_twice_and_loses_nothing(tmp_path, senses):
    first = Listening(tmp_path, senses)
    senses.say(READ.format("sda", 2048), "ata1: hard resetting link")
    first.ears.once()
    first.end()
    senses.say(READ.format("sda", 9000))
    again = Listening(tmp_path, senses)
    again.ears.once()
    assert again.counts(1)["unreadable-sectors"] == 2
    again.end()
    assert len(again.book()) == 2


def test_a_pass_hears_only_of_what_is_kept(tmp_path, senses, monkeypatch):
    here = Listening(tmp_path, senses)
    monkeypatch.setattr(here.ears, "_keep", lambda: None)
    senses.say(READ.format("sda", 2048))
    here.ears.once()
    assert here.counts(1)["kernel-io-errors"] == 0
    here.keeper.close()


def test_a_trouble_under_way_goes_on_after_a_restart(tmp_path, senses):
    first = Listening(tmp_path, senses)
    senses.say("sda is no line of ours", "nvme nvme0n1: nothing")
    senses.say("nvme0n1: Write(0x1) @ LBA 9, 8 blocks, Is Write Protected (sct 0x0 / sc 0x20) DNR")
    first.ears.once()
    first.end()
    assert first.book() == []
    again = Listening(tmp_path, senses)
    senses.now += 100
    again.ears.once()
    again.end()
    assert again.book() == [
        (2, "A command to nvme0n1 ended with an error (Is Write Protected (sct 0x0 / sc 0x20)).")
    ]


def test_nothing_is_heard_before_it_is_known_which_drives_there_are(tmp_path, senses, monkeypatch):
    here = Listening(tmp_path, senses)
    monkeypatch.setattr(here.ears, "_blocks", dict)
    senses.say(READ.format("sda", 2048))
    here.ears.once()
    monkeypatch.setattr(here.ears, "_blocks", lambda: BLOCKS)
    here.ears.once()
    assert here.counts(1)["unreadable-sectors"] == 1
    here.end()


def test_a_log_that_may_not_be_read_is_said_and_breaks_nothing(tmp_path, senses):
    senses.refusal = "the kernel's log cannot be read"
    here = Listening(tmp_path, senses)
    here.ears.start()
    here.ears.once()
    assert here.ears.trouble == senses.refusal
    assert here.ears.heard(1) == ()
    here.end()


def test_a_flood_of_events_is_counted_whole_and_told_in_part(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.say(*(READ.format("sda", place * 8) for place in range(100)), after=0.001)
    here.ears.once()
    assert here.counts(1)["unreadable-sectors"] == 100
    here.end()
    book = [text for _, text in here.book()]
    assert len(book) == MOST_TOLD + 1
    assert sum("80 more events" in text for text in book) == 1


def test_lines_that_were_overwritten_are_said(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.say("usb 1-1: something else")
    senses.opened[-1].lost = 3
    here.ears.once()
    here.end()
    assert [text for _, text in here.book() if "3 lines" in text]


def test_hostile_names_and_words_stay_inert(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.say(
        "EXT4-fs error (device sda): x:1: comm \x1b[2J\x07: \N{RIGHT-TO-LEFT OVERRIDE}",
        READ.format("s\x1bda", 1),
    )
    here.ears.once()
    here.end()
    ((_, text),) = here.book()
    assert "\x1b" not in text
    assert "\x07" not in text
    assert "\N{RIGHT-TO-LEFT OVERRIDE}" not in text


def test_the_time_of_an_event_is_that_of_its_line(tmp_path, senses):
    here = Listening(tmp_path, senses)
    senses.say(READ.format("sda", 8))
    senses.now += 3_000
    here.ears.once()
    here.end()
    with Past.open(tmp_path) as past:
        (entry,) = [entry for entry in past.day_book() if entry.kind == "kernel"]
    assert entry.at == NOON - 3_000
    assert entry.data["sector"] == 8


def test_the_thread_follows_a_file_and_ends_at_once(tmp_path, monkeypatch):
    monkeypatch.setattr(room, "FILE_EVERY", 0.02)
    monkeypatch.setattr(room, "KEEP_EVERY", 0.0)
    source = tmp_path / "kmsg"
    source.write_text("6,1,1000000,-;begun\n")

    class Named(RealSenses):
        def names(self, _drives):
            return {"sda": ("1",)}

    here = Listening(tmp_path / "state", Named(str(source)))
    here.ears.start()
    with source.open("a") as file:
        file.write(f"3,2,90000000,-;{READ.format('sda', 2048)}\n")
    until = time.monotonic() + 10
    while not here.soon and time.monotonic() < until:
        time.sleep(0.01)
    assert here.soon
    assert here.counts(1)["unreadable-sectors"] == 1
    begun = time.monotonic()
    here.end()
    assert time.monotonic() - begun < 2


def test_a_fault_of_our_own_ends_in_a_trouble_and_not_in_silence(tmp_path, monkeypatch):
    monkeypatch.setattr(room, "FILE_EVERY", 0.01)
    source = tmp_path / "kmsg"
    source.write_text("6,1,1000000,-;begun\n")
    here = Listening(tmp_path / "state", RealSenses(str(source)))
    monkeypatch.setattr(here.ears, "_hear", lambda: 1 / 0)
    here.ears.start()
    here.ears._thread.join(10)
    assert "ZeroDivisionError" in (here.ears.trouble or "")
    here.end()


def test_a_log_that_breaks_off_is_said_and_what_was_heard_is_kept(tmp_path, senses, monkeypatch):
    here = Listening(tmp_path, senses)
    senses.say(READ.format("sda", 8))
    log = senses.opened[-1]
    first = log.read

    def breaks(most=4_096):
        if found := first(most):
            return found
        raise DiskwatchError("the kernel's log cannot be read: Input/output error")

    monkeypatch.setattr(log, "read", breaks)
    here.ears.once()
    assert "Input/output error" in (here.ears.trouble or "")
    assert here.counts(1)["kernel-io-errors"] == 1
    here.end()


def test_what_another_machine_heard_of_a_drive_is_counted_on_after_its_past_arrived(tmp_path, senses):
    there = ScriptedSenses()
    other = Listening(tmp_path / "there", there)
    for one in range(30):
        there.say(READ.format("sda", 2048 + one * 5000))
    other.ears.once()
    other.end()
    with Past.open(tmp_path / "there") as past:
        lines = past.lines(1)
    here = Listening(tmp_path / "here", senses)
    here.keeper.change(lambda history: take_in(history, lines, NOON + 5))
    assert here.counts(1)["kernel-io-errors"] == 30
    senses.say(READ.format("sda", 999_999))
    here.ears.once()
    assert here.counts(1)["kernel-io-errors"] == 31
    here.end()


def test_what_was_heard_before_the_history_came_into_reach_stays_with_its_drive(tmp_path, senses):
    state, away = tmp_path / "state", tmp_path / "away"
    keeper = Keeper(state)
    for drive in (NVME, HDD):
        keeper.record(Round(at=NOON, drives=(a_part(keeper.admit(drive, HERE, NOON), a_pass(NOON)),)))
    keeper.close()
    state.rename(away)
    state.write_text("in the way")
    here = Listening(state, senses)
    assert [known.drive for known in here.keeper.known] == [HDD, NVME]
    senses.say(READ.format("sda", 2048))
    here.ears.once()
    state.unlink()
    away.rename(state)
    here.keeper.try_again()
    assert [known.drive for known in here.keeper.known] == [NVME, HDD]
    assert here.counts(1)["kernel-io-errors"] == 0
    assert here.counts(2)["kernel-io-errors"] == 1
    # What the next round tells of the names.
    here.ears._blocks = lambda: {1: ("nvme0n1",), 2: ("sda",)}
    senses.say(READ.format("nvme0n1", 7_777_777))
    here.ears.once()
    here.end()
    heard = [(drive, text) for drive, text in here.book() if drive is not None]
    assert [(drive, text.split()[3]) for drive, text in heard] == [(2, "sda"), (1, "nvme0n1")]
