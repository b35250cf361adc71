from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from diskwatch.machine import real
from diskwatch.machine.protocol import Address, Counted, Found
from diskwatch.machine.real import RealMachine
from diskwatch.machine.smartctl import Scan
from diskwatch.records import Drive, Identity, IoCounts, Kind, Mount, Outcome, Pass, Reading, Way
from tests.machine.recordings import FIXTURES
from tests.machine.trees import Tree

AT = 1_800_000_000
BEHIND_BRIDGE = Drive(
    identity=Identity(wwn="naa.5000f00000000009", model="INVENTED INSIDE", serial="INV-IN-9", path="/dev/sdb"),
    kind=Kind.USB,
    rotation_rpm=5400,
)


class Asked:
    """Stands where smartctl stands: answers as told, and keeps what it was asked."""

    def __init__(self) -> None:
        self.scanned = Scan(entries=(), trouble=None)
        self.answer = Pass(at=AT, outcome=Outcome.READ, reading=Reading(), took_ms=12)
        self.asked: list[Address] = []
        self.completed: list[int | None] = []
        self.stopped = False
        self.made_with: tuple[str, float] | None = None

    def make(self, command: str, timeout: float, now: Callable[[], int], *, kept: object) -> "Asked":
        assert now() == AT
        assert kept == ()
        self.made_with = (command, timeout)
        return self

    def scan(self) -> Scan:
        return self.scanned

    def ask(self, found: Found, *, completed: Callable[[], int | None]) -> Pass:
        self.asked.append(found.address)
        self.completed.append(completed())
        return self.answer

    def stop(self) -> None:
        self.stopped = True


@pytest.fixture
def smartctl(monkeypatch: pytest.MonkeyPatch) -> Asked:
    stand_in = Asked()
    monkeypatch.setattr(real, "Smartctl", stand_in.make)
    return stand_in


def machine(tree: Tree, only: tuple[str, ...] = (), ignore: tuple[str, ...] = ()) -> RealMachine:
    return RealMachine(
        command="smartctl",
        timeout=30.0,
        only=only,
        ignore=ignore,
        sys_root=tree.sys,
        proc_root=tree.proc,
        dev_root=tree.dev,
        now=lambda: AT,
    )


def devices(tree: Tree, only: tuple[str, ...] = (), ignore: tuple[str, ...] = ()) -> list[str]:
    return [found.place.device for found in machine(tree, only, ignore).survey().found]


@pytest.mark.usefixtures("smartctl")
def test_a_survey_says_what_lives_on_each_drive(tree: Tree):
    tree.partition(tree.sata(), "sda1", "8:1")
    tree.usb()
    tree.mount("8:1", "/no/such/folder/here", "ext4", "/dev/sda1")
    sata, stick = machine(tree).survey().found
    assert sata.place.lives_here == (Mount(point="/no/such/folder/here"),)
    assert stick.place.lives_here == ()


def test_a_suspended_drive_is_not_even_asked_for_the_size_of_its_file_systems(
    tree: Tree, smartctl: Asked, monkeypatch: pytest.MonkeyPatch
):
    monkeypatch.setattr(real, "measured", lambda *_: (1, 2))
    tree.sata("sda", files={"device/power/runtime_status": "suspended"})
    tree.sata("sdb", "8:16", port=4, files={"device/power/runtime_status": "active"})
    tree.mount("8:0", "/asleep", "ext4", "/dev/sda")
    tree.mount("8:16", "/awake", "ext4", "/dev/sdb")
    asleep, awake = machine(tree).survey().found
    assert asleep.place.lives_here == (Mount(point="/asleep"),)
    assert awake.place.lives_here == (Mount(point="/awake", used_bytes=1, total_bytes=2),)
    assert smartctl.asked == []


def test_without_smartctl_the_kernels_drives_are_listed_and_the_cure_is_told(tree: Tree, smartctl: Asked):
    tree.sata()
    smartctl.scanned = Scan(entries=(), trouble="smartctl was not found: install it")
    survey = machine(tree).survey()
    assert [found.place.device for found in survey.found] == ["/dev/sda"]
    assert survey.troubles == ("smartctl was not found: install it",)


def test_a_machine_without_sysfs_says_so_and_still_lists_what_the_scan_knows(tmp_path: Path, smartctl: Asked):
    smartctl.scanned = Scan(entries=(Address(node="/dev/bus/0", type="megaraid,7"),), trouble=None)
    survey = RealMachine(
        sys_root=tmp_path / "sys", proc_root=tmp_path, dev_root=tmp_path, now=lambda: AT
    ).survey()
    assert [found.place.device for found in survey.found] == ["/dev/bus/0 megaraid,7"]
    (trouble,) = survey.troubles
    assert "lists no block device" in trouble


@pytest.mark.usefixtures("smartctl")
def test_the_owner_may_name_the_drives_to_watch_or_to_leave_alone(tree: Tree):
    tree.sata("sda", serial="INV-1", wwid=None)
    tree.sata("sdb", "8:16", port=4, serial="INV-2", wwid=None)
    assert devices(tree, only=("inv-2",)) == ["/dev/sdb"]
    assert devices(tree, ignore=("/dev/sdb",)) == ["/dev/sda"]
    assert devices(tree, only=("INV-1", "INV-2"), ignore=("sda",)) == ["/dev/sdb"]


def test_a_suspended_drive_is_left_asleep(tree: Tree, smartctl: Asked):
    tree.sata(files={"device/power/runtime_status": "suspended"})
    watched = machine(tree)
    (found,) = watched.survey().found
    answer = watched.ask(found)
    assert (answer.at, answer.outcome, answer.reading) == (AT, Outcome.ASLEEP, None)
    assert answer.explanation == "It is suspended by the kernel and was not asked, since that would wake it."
    assert smartctl.asked == []


def test_a_drive_that_fell_asleep_after_the_survey_is_left_asleep_too(tree: Tree, smartctl: Asked):
    disk = tree.sata()
    watched = machine(tree)
    (found,) = watched.survey().found
    assert not found.asleep
    tree.put(disk / "device/power/runtime_status", "suspended")
    assert watched.ask(found).outcome is Outcome.ASLEEP
    assert watched.ask(replace(found, blocks=())).outcome is Outcome.READ
    assert len(smartctl.asked) == 1


def test_a_virtual_disk_is_asked_once_in_its_life(tree: Tree, smartctl: Asked):
    tree.virtio()
    smartctl.answer = Pass(at=AT, outcome=Outcome.GARBLED, explanation="odd", exit_bits=1, took_ms=9)
    watched = machine(tree)
    (found,) = watched.survey().found
    first, second = watched.ask(found), watched.ask(found)
    assert len(smartctl.asked) == 1
    assert first.outcome is second.outcome is Outcome.NO_SMART
    assert first.explanation == second.explanation
    assert first.explanation == "It is a virtual disk and has no SMART; its traffic is watched all the same."
    assert (first.took_ms, first.exit_bits) == (9, 1)
    assert (second.at, second.took_ms, second.exit_bits) == (AT, 0, None)


def test_a_virtual_disk_that_came_anew_is_asked_anew(tree: Tree, smartctl: Asked):
    disk = tree.virtio()
    smartctl.answer = Pass(at=AT, outcome=Outcome.NO_SMART, explanation="none")
    watched = machine(tree)
    (found,) = watched.survey().found
    watched.ask(found)
    tree.put(disk / "diskseq", "77")
    watched.ask(found)
    assert len(smartctl.asked) == 2


def test_a_missing_tool_is_told_as_such_for_a_virtual_disk_too(tree: Tree, smartctl: Asked):
    tree.virtio()
    smartctl.answer = Pass(at=AT, outcome=Outcome.NO_TOOL, explanation="no tool")
    watched = machine(tree)
    (found,) = watched.survey().found
    assert watched.ask(found) == watched.ask(found) == smartctl.answer


def test_a_virtual_disk_that_answers_after_all_is_believed(tree: Tree, smartctl: Asked):
    tree.virtio()
    watched = machine(tree)
    (found,) = watched.survey().found
    assert watched.ask(found) == watched.ask(found) == smartctl.answer
    assert len(smartctl.asked) == 2


def test_a_drives_requests_are_counted_for_whoever_asks_it(
    tree: Tree, smartctl: Asked, monkeypatch: pytest.MonkeyPatch
):
    tree.sata()
    watched = machine(tree)
    counts = IoCounts(reads=1, writes=3, read_bytes=0, write_bytes=0, read_ms=0, write_ms=0, busy_ms=0)
    monkeypatch.setattr(watched, "counts", lambda: {"sda": Counted(counts=counts, instance="1")})
    (found,) = watched.survey().found
    watched.ask(found)
    watched.ask(replace(found, blocks=("sda", "gone")))
    assert smartctl.completed == [4, None]
    tree.put(tree.sys / "block/sda/queue/iostats_passthrough", "0")
    watched.ask(found)
    assert smartctl.completed == [4, None, 4]
    tree.put(tree.sys / "block/sda/queue/iostats_passthrough", "1")
    watched.ask(found)
    assert smartctl.completed == [4, None, 4, None]


@pytest.mark.usefixtures("smartctl")
def test_another_device_under_the_same_name_is_another_instance(tree: Tree):
    disk = tree.usb()
    watched = machine(tree)
    first, same = (watched.survey().found[0].instance for _ in range(2))
    tree.put(disk / "diskseq", "77")
    assert first == same != watched.survey().found[0].instance


def test_what_a_drive_said_of_itself_holds_while_its_instance_lasts(tree: Tree, smartctl: Asked):
    disk = tree.usb()
    smartctl.answer = Pass(at=AT, outcome=Outcome.READ, drive=BEHIND_BRIDGE, reading=Reading())
    watched = machine(tree)
    (found,) = watched.survey().found
    assert found.drive.identity.serial == "INV-BRIDGE-7"
    watched.ask(found)
    smartctl.answer = Pass(at=AT, outcome=Outcome.TIMED_OUT, explanation="slow")
    watched.ask(found)
    (again,) = watched.survey().found
    assert again.drive == BEHIND_BRIDGE
    tree.put(disk / "diskseq", "77")
    (other,) = watched.survey().found
    assert other.drive.identity.serial == "INV-BRIDGE-7"


def test_a_drive_behind_a_bridge_is_dropped_once_it_says_that_it_is_not_meant(tree: Tree, smartctl: Asked):
    tree.usb()
    smartctl.answer = Pass(at=AT, outcome=Outcome.READ, drive=BEHIND_BRIDGE, reading=Reading())
    for only, left in (("INV-IN-9", 1), ("INV-ELSE", 0)):
        watched = machine(tree, only=(only,))
        (found,) = watched.survey().found
        watched.ask(found)
        assert len(watched.survey().found) == left


def test_command_and_time_limit_are_handed_on_and_a_stop_is_passed_down(tree: Tree, smartctl: Asked):
    watched = machine(tree)
    assert smartctl.made_with == ("smartctl", 30.0)
    assert not smartctl.stopped
    watched.stop()
    assert smartctl.stopped


@pytest.mark.usefixtures("smartctl")
def test_the_traffic_of_this_computers_drives_is_counted():
    here = RealMachine(now=lambda: AT)
    blocks = {block for found in here.survey().found for block in found.blocks}
    assert blocks <= here.counts().keys()


def test_an_ata_drive_that_only_the_scan_knows_as_scsi_is_read_through_sat_in_one_pass_and_so_ever_after(
    tree: Tree, tmp_path: Path
):
    command, log = tmp_path / "smartctl", tmp_path / "asked"
    command.write_text(
        "#!/bin/sh\n"
        f'echo "$*" >> {log}\n'
        'case "$*" in\n'
        "*--scan*) echo '/dev/sdq -d scsi # /dev/sdq, SCSI device';;\n"
        "*'-d scsi'*) printf 'smartctl 7.3 2022-02-28 r5338\\n\\n"
        "Probable ATA device behind a SAT layer\\nTry an additional -d sat argument.\\n'; exit 2;;\n"
        f"*) cat {FIXTURES / 'invented_hdd_failing' / 'all.txt'};;\n"
        "esac\n"
    )
    command.chmod(0o755)
    watched = RealMachine(
        command=str(command), sys_root=tree.sys, proc_root=tree.proc, dev_root=tree.dev, now=lambda: AT
    )
    for _ in range(2):
        (found,) = watched.survey().found
        assert found.blocks == ()
        assert watched.ask(found).outcome is Outcome.READ
    types = [line.split()[3] for line in log.read_text().splitlines() if "--scan" not in line]
    assert types == ["scsi", "sat", "sat"]


def test_after_a_restart_a_drive_behind_an_unknown_usb_adapter_costs_exactly_one_process(
    tree: Tree, tmp_path: Path
):
    unknown = FIXTURES / "invented_usb_bridge_unknown" / "all.txt"
    read = FIXTURES / "nvme_usb_asmedia_issue_97" / "all.txt"
    command, log = tmp_path / "smartctl", tmp_path / "asked"
    command.write_text(
        "#!/bin/sh\n"
        'case "$*" in *--scan*) exit 0;; esac\n'
        f'echo "$*" >> {log}\n'
        'case "$*" in\n'
        f"*'-d sntasmedia'*) cat {read};;\n"
        f"*--version*) head -1 {read};;\n"
        f"*) cat {unknown}; exit 1;;\n"
        "esac\n"
    )
    command.chmod(0o755)
    tree.usb()
    bridge = tree.sys / "devices/pci0000:00/0000:00:14.0/usb1/1-4"
    for name, text in (("idVendor", "174c"), ("idProduct", "2364"), ("bcdDevice", "0100")):
        tree.put(bridge / name, text)
    ways: tuple[Way, ...] = ()
    asked = []
    for _ in range(3):  # each time a program that has just been started
        log.write_text("")
        watched = RealMachine(
            command=str(command),
            ways=ways,
            sys_root=tree.sys,
            proc_root=tree.proc,
            dev_root=tree.dev,
            now=lambda: AT,
        )
        (found,) = watched.survey().found
        answer = watched.ask(found)
        assert answer.outcome is Outcome.READ
        ways = ways if answer.way is None else (answer.way,)
        asked.append(sum("--all" in line for line in log.read_text().splitlines()))
    assert asked == [4, 1, 1]


def test_no_self_test_is_begun_on_a_drive_that_the_kernel_has_suspended(tree: Tree, smartctl: Asked):
    disk = tree.sata()
    watched = machine(tree)
    (found,) = watched.survey().found
    tree.put(disk / "device/power/runtime_status", "suspended")
    refused = watched.begin_test(found, extended=False)
    assert refused is not None
    assert "suspended" in refused
    assert smartctl.asked == []
