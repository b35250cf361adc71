import sys
import time
from pathlib import Path

import msgspec
import pytest

from diskwatch.machine.kernel_events import QUIET, SAME, Gathered, hear, settle
from diskwatch.machine.kernel_line import Line, line_of
from diskwatch.records import Event, EventKind

RECORDED = Path(__file__).parents[2] / "fixtures" / "kernel" / "lab_6_1.kmsg"
DRIVES = {
    name: (drive,)
    for drive, names in {
        "hdd": "sda ata1 ata1.00 0:0:0:0",
        "ssd": "sdc ata2 ata2.00 1:0:0:0 dm-0",
        "usb": "sdd 7:0:0:0",
        "scsi": "sdb 6:0:0:0",
        "nvme": "nvme0n1 nvme0",
        "vblk": "vdb vdb1",
        "made": "sde 8:0:0:0",
    }.items()
    for name in names.split()
}


class Log:
    """A kernel's log of a few lines, one a second from when the boot has long settled."""

    def __init__(self):
        self.kept = Gathered()
        self.now = 1000.0
        self.found = []

    def say(self, *lines, after=1.0):
        for line in lines:
            self.now += after
            self.found += hear(self.kept, Line(0, self.now, line), DRIVES)
        return self

    def over(self):
        self.found += settle(self.kept, self.now + QUIET)
        return [(drive, event.kind) for drive, event in self.found]


@pytest.fixture
def log():
    return Log()


FAILED = (
    "ata1.00: exception Emask 0x0 SAct 0x0 SErr 0x0 action 0x6",
    "ata1.00: failed command: READ DMA",
)
READ = "I/O error, dev {}, sector {} op 0x0:(READ) flags 0x0 phys_seg 1 prio class 2"


def line_in(record):
    """The line that a record of ours holds."""
    line = line_of(record)
    assert line is not None, record
    return line


def recorded():
    """What was heard in each part of the recording, by the mark before it."""
    kept, at = Gathered(), ""
    parts: dict[str, list[tuple[str, Event]]] = {}
    for record in RECORDED.read_bytes().splitlines():
        line = line_in(record)
        if b";MARK " in record:
            at = record.partition(b";MARK ")[2].decode().partition(" /")[0]
        if b" unplug usb" in record:
            parts.setdefault("once ssd", []).extend(settle(kept, line.seconds + QUIET))
        parts.setdefault(at, []).extend(hear(kept, line, DRIVES))
    parts["end"] = list(settle(kept, 1e9))
    return parts


def test_each_bad_sector_of_the_recording_is_one_event_of_the_right_drive_at_the_right_place():
    parts = recorded()
    for drive in ("hdd", "nvme", "usb", "scsi", "vblk"):
        ((who, event),) = parts[f"bad {drive}"]
        assert (who, event.kind, event.sector) == (drive, EventKind.UNREADABLE, 2048)
        assert not parts[f"badbuffered {drive}"], "the same place again is no news"
        ((who, event),) = parts[f"badwrite {drive}"]
        assert (who, event.kind, event.sector) == (drive, EventKind.UNWRITABLE, 2048)


def test_forty_five_lines_of_one_bad_read_are_one_event():
    ((_, event),) = recorded()["bad hdd"]
    assert event.lines > 45


def test_what_else_happened_in_the_recording_is_told_of_the_right_drive_and_of_no_other():
    parts = recorded()
    heard = {at: [(who, event.kind) for who, event in found] for at, found in parts.items()}
    assert heard["once ssd"] == [("ssd", EventKind.PASSING)]
    assert heard["scsi_debug medium"] == [("made", EventKind.UNREADABLE)]
    assert heard["scsi_debug timeout"] == [("made", EventKind.OFFLINED)]
    assert heard["md"] == [("vblk", EventKind.UNWRITABLE), ("vblk", EventKind.ARRAY)]
    assert heard["ext4"] == [("ssd", EventKind.FILE_SYSTEM)]
    for quiet in ("unplug usb", "plug usb", "unplug nvme", "plug nvme", "satadelete", "end"):
        assert heard[quiet] == [], quiet


def test_only_the_drives_own_word_accuses_its_medium():
    parts = recorded()
    assert [event.medium for _, event in parts["scsi_debug medium"]] == [True]
    assert [event.medium for _, event in parts["bad nvme"]] == [True]
    assert [event.medium for _, event in parts["bad vblk"]] == [False]


def test_resets_without_a_failed_request_are_one_reset_of_the_link(log):
    log.say(
        "ata1.00: exception Emask 0x10 SAct 0x0 SErr 0x400000 action 0x6 frozen",
        "ata1: SError: { Handshk }",
        "ata1: hard resetting link",
        "ata1: hard resetting link",
        "ata1: EH complete",
    )
    assert log.over() == [("hdd", EventKind.LINK_RESET)]


def test_a_link_that_is_made_slower_in_passing_is_told(log):
    assert log.say("ata1: limiting SATA link speed to 1.5 Gbps").over() == [("hdd", EventKind.LINK_SLOWED)]


def test_an_unanswered_command_is_a_time_out_and_its_failed_request_no_unreadable_sector(log):
    log.say(*FAILED, "         res 40/00:00/00 Emask 0x4 (timeout)", "ata1: hard resetting link")
    log.say(READ.format("sda", 4096))
    assert log.over() == [("hdd", EventKind.TIMED_OUT)]
    assert log.found[0][1].sector == 4096


def test_the_media_error_behind_a_time_out_wins(log):
    log.say(*FAILED, "         res 40/00:00/00 Emask 0x4 (timeout)", "ata1.00: error: { UNC }")
    log.say(READ.format("sda", 4096))
    assert log.over() == [("hdd", EventKind.UNREADABLE)]


def test_what_fails_after_the_drive_was_given_up_is_no_news(log):
    log.say("sd 6:0:0:0: Device offlined - not ready after error recovery")
    log.say(*(READ.format("sdb", place) for place in range(0, 800, 8)))
    assert log.over() == [("scsi", EventKind.OFFLINED)]


def test_a_drive_that_is_taken_out_in_good_order_has_not_dropped_out(log):
    assert log.say("sd 0:0:0:0: [sda] Stopping disk", "ata1.00: disable device").over() == []


def test_a_controller_that_stops_is_told_at_once(log):
    log.say(
        "nvme nvme0: I/O 5 (I/O Cmd) QID 1 timeout, aborting",
        "nvme nvme0: controller is down; will reset: CSTS=0xffffffff, PCI_STATUS=0xffff",
        READ.format("nvme0n1", 8),
    )
    assert log.over() == [("nvme", EventKind.CONTROLLER_DOWN)]


def test_a_lost_interrupt_is_not_the_drives_fault(log):
    assert log.say("nvme nvme0: I/O 5 QID 1 timeout, completion polled").over() == []


def test_an_nvme_status_without_a_failed_request_is_an_event_of_its_own(log):
    log.say("nvme0n1: Write(0x1) @ LBA 9, 8 blocks, Namespace is Write Protected (sct 0x0 / sc 0x20) DNR")
    assert log.over() == [("nvme", EventKind.NVME)]
    assert "sc 0x20" in log.found[0][1].words


def test_resets_while_the_machine_boots_or_wakes_are_normal():
    log = Log()
    log.now = 3.0
    assert log.say("ata1: hard resetting link").over() == []
    log.now = 5000.0
    assert log.say("PM: suspend exit", "ata1: hard resetting link").over() == []


def test_the_same_place_speaks_again_after_a_while(log):
    log.say(READ.format("sda", 4096), READ.format("sda", 4097))
    log.say(READ.format("sda", 4096), after=SAME + 1)
    assert log.over() == [("hdd", EventKind.UNREADABLE)] * 2


def test_two_drives_in_trouble_at_once_are_kept_apart(log):
    log.say(*FAILED, "sd 6:0:0:0: [sdb] tag#1 Sense Key : Medium Error [current] ")
    log.say(READ.format("sda", 8), READ.format("sdb", 16))
    assert [(drive, event.medium) for drive, event in log.found] == [("hdd", False), ("scsi", True)]


def test_a_volume_that_fails_accuses_no_drive(log):
    log.say("Buffer I/O error on dev dm-0, logical block 1, lost sync page write", READ.format("dm-0", 8))
    assert log.over() == []


def test_lines_of_strangers_and_unknown_lines_are_counted(log):
    log.say("ata9: hard resetting link", "ata1.00: never printed before", "eth0: up")
    assert (log.kept.lines, log.kept.unplaced, log.kept.unknown) == (3, 1, 1)


def test_a_restart_in_the_middle_of_a_trouble_changes_nothing():
    lines = [line_in(record) for record in RECORDED.read_bytes().splitlines()]
    whole, cut = Gathered(), Gathered()
    told = [pair for line in lines for pair in hear(whole, line, DRIVES)]
    again: list[tuple[str, Event]] = []
    for number, line in enumerate(lines):
        again += hear(cut, line, DRIVES)
        if number % 7 == 0:
            cut = msgspec.json.decode(msgspec.json.encode(cut), type=Gathered)
    assert again == told


NOISE = "ata1.00: cmd 60/01:58:00:08:00/00:00:00:00:00/40 tag 11 ncq dma 512 in"


def flood(noise, every):
    """Processor time of a hundred thousand lines, and the events that they brought."""
    lines = [noise.encode()] * 100_000
    for number in range(0, len(lines), every):
        lines[number] = READ.format("vdb", number * 64).encode()
    records = [b"3,%d,%d,-;%s" % (number, 60_000_000 + number * 10, text) for number, text in enumerate(lines)]
    kept, found = Gathered(), 0
    begun = time.process_time()
    for record in records:
        found += len(hear(kept, line_in(record), DRIVES))
    return time.process_time() - begun, found


def test_a_flood_loses_no_event_and_costs_little():
    spent, found = flood(NOISE, 1000)
    assert found == 100
    assert spent < 3.0, f"{spent:.2f} s"  # three times the goal, which is measured apart, on a quiet machine


@pytest.mark.bench
@pytest.mark.parametrize(
    ("noise", "every"),
    [("usb 1-4: new device", 1000), (NOISE, 1000), (NOISE, 1)],
    ids=["strange", "ata", "failed"],
)
def test_bench_a_hundred_thousand_lines(noise, every):
    spent, found = flood(noise, every)
    sys.stdout.write(f"\n100,000 lines, every {every}. a failed request: {spent:.2f} s of processor time\n")
    assert found == 100_000 // every
    assert spent < 1.0


def test_ending_all_there_is_leaves_the_ears_open_for_what_comes_next(log):
    log.say("ata1: hard resetting link")
    log.found += settle(log.kept, float("inf"))
    kept = msgspec.json.decode(msgspec.json.encode(log.kept), type=Gathered)
    assert kept == log.kept
    log.say("ata1: hard resetting link")
    assert log.over() == [("hdd", EventKind.LINK_RESET)] * 2
