"""Disks that fail, vanish, hang or lose their array: what the watch hears of them besides their own word."""

import os
import subprocess
import sys
import time

from diskwatch.errors import DiskwatchError
from diskwatch.history.reader import Past
from diskwatch.records import DriveLine, Entry
from tests.lab.bench import HERE, check, end, lab, say, sh, wait

SETTINGS = """
[smart]
every = "20m"
timeout = "10s"
"""
BAD = {"hdd": 2048, "nvme": 4096, "usb": 6144, "scsi": 8192, "vblk": 10240}
SERIALS = {
    "hdd": "LABHDD0001",
    "ssd": "LABSSD0001",
    "nvme": "LABNVME001",
    "usb": "LABUSB0001",
    "vblk": "LABVBLK001",
    "scsi": "LABSAS0001",
}


class Watching:
    """The service itself, in a process of its own."""

    def __init__(self) -> None:
        self.folder = HERE / "senses"
        self.settings = HERE / "senses.toml"
        self.settings.write_text(SETTINGS)
        self.start()

    def start(self) -> None:
        """Begin to watch."""
        state = ["--state", str(self.folder), "--settings", str(self.settings)]
        self.process = subprocess.Popen(
            [sys.executable, "-m", "diskwatch", "watch", *state],
            env=dict(os.environ),
            stdout=subprocess.DEVNULL,
        )

    def stop(self) -> None:
        """End it well."""
        self.process.terminate()
        check(self.process.wait(30) == 0, "the watch ends well")

    def lines(self) -> dict[str, DriveLine]:
        """The drives by their serials."""
        try:
            with Past.open(self.folder) as past:
                return {line.drive.identity.serial or "": line for line in past.bays(int(time.time())).drives}
        except DiskwatchError:
            return {}

    def events(self) -> list[tuple[str, Entry]]:
        """What the kernel told, oldest first, each with the serial of its drive."""
        serials = {line.number: serial for serial, line in self.lines().items()}
        with Past.open(self.folder) as past:
            entries = [entry for entry in past.day_book() if entry.kind == "kernel"]
        return [
            (serials.get(entry.drive or 0, "?"), entry) for entry in sorted(entries, key=lambda one: one.at)
        ]

    def told(self, name: str, event: str) -> list[Entry]:
        """Events of one kind of one disk."""
        return [
            entry for serial, entry in self.events() if serial == SERIALS[name] and entry.data["event"] == event
        ]

    def call(self, name: str) -> tuple[str, str]:
        """A disk's call and the rule behind it."""
        call = self.lines()[SERIALS[name]].call
        return (call.word.value, call.rule) if call is not None else ("none", "")


def bad_sectors(watching: Watching) -> None:
    """One read of a bad sector on each disk, and a restart behind it."""
    for name, sector in BAD.items():
        lab("bad", name, str(sector))
        node = lab("dev", name)
        sh(f"dd if={node} of=/dev/null bs=512 skip={sector} count=1 iflag=direct", check=False)
        sh(f"dd if={node} of=/dev/null bs=4k skip={sector // 8} count=1", check=False)
        lab("good", name)
    for name in BAD:
        wait(f"{name}: told", lambda name=name: watching.told(name, "unreadable-sector"), 60)
    for name, sector in BAD.items():
        found = watching.told(name, "unreadable-sector")
        check([one.data["sector"] for one in found] == [sector], f"{name}: one event, at sector {sector}")
    others = {serial for serial, _ in watching.events()} - {SERIALS[name] for name in BAD}
    check(not others, f"no other drive is accused {others}")
    for name in BAD:
        wait(f"{name}: judged", lambda name=name: watching.call(name)[0] == "look", 60)
        check(watching.call(name) == ("look", "fact:unreadable-sector"), f"{name}: {watching.call(name)}")
    check(watching.call("ssd")[0] == "keep", "the disk without trouble is kept")
    before = len(watching.events())
    watching.stop()
    watching.start()
    time.sleep(12)
    check(len(watching.events()) == before, f"a restart tells nothing twice: {before} events")


def passing(watching: Watching) -> None:
    """A read that goes through at the second try."""
    lab("once", "ssd")
    sh(f"dd if={lab('dev', 'ssd')} of=/dev/null bs=512 skip=128 count=1 iflag=direct", check=False)
    wait("ssd: told", lambda: watching.told("ssd", "passing-error"), 90)
    check(watching.call("ssd")[0] == "keep", "a passing error calls nothing")


def array(watching: Watching) -> None:
    """A mirror that loses a member."""
    one, other = lab("dev", "scsi"), lab("dev", "vblk")
    sh("modprobe raid1")
    sh(f"mdadm --create /dev/md0 --run --level=1 --raid-devices=2 --metadata=1.2 {one} {other}")
    sh("mdadm --wait /dev/md0", check=False)
    lab("bad", "vblk")
    sh("dd if=/dev/zero of=/dev/md0 bs=4k count=4 oflag=direct", check=False)
    wait("array: told", lambda: watching.told("vblk", "array-error"), 60)
    check(len(watching.told("vblk", "array-error")) == 1, "the member that failed is told once")
    check(not watching.told("scsi", "array-error"), "the other one is not")
    wait("array: judged", lambda: "degraded-arrays" in _signals(watching, "vblk"), 60)
    say(f"       {_signals(watching, 'vblk')}")
    sh("mdadm --stop /dev/md0; lab good vblk", check=False)


def _signals(watching: Watching, name: str) -> dict[str, object]:
    return {one.name: one.value for one in watching.lines()[SERIALS[name]].signals}


def file_system(watching: Watching) -> None:
    """An ext4 whose disk goes away under it."""
    node = lab("dev", "ssd")
    size = sh(f"blockdev --getsz {node}")
    sh(f"echo '0 {size} linear {node} 0' | dmsetup create maps && mkfs.ext4 -q -F /dev/mapper/maps")
    sh("mkdir -p /run/maps && mount /dev/mapper/maps /run/maps && mkdir /run/maps/a && sync")
    sh(f"dmsetup suspend maps && echo '0 {size} error' | dmsetup load maps && dmsetup resume maps")
    sh("echo 3 >/proc/sys/vm/drop_caches; ls /run/maps/a; touch /run/maps/b; sync", check=False)
    wait("ext4: told", lambda: watching.told("ssd", "file-system-error"), 60)
    check(len(watching.told("ssd", "file-system-error")) == 1, "a file system in trouble is told once")
    wait("ext4: judged", lambda: watching.call("ssd")[0] == "look", 60)
    check(watching.call("ssd") == ("look", "fact:file-system"), f"ssd: {watching.call('ssd')}")
    say(f"       {_signals(watching, 'ssd').get('ext4-errors')} errors counted by ext4")
    sh("umount /run/maps; dmsetup remove maps", check=False)


def vanishing(watching: Watching) -> None:
    """A disk that no longer answers and is given up, and one that is taken out in good order."""
    before = len(watching.events())
    lab("unplug", "usb")
    time.sleep(8)
    check(len(watching.events()) == before, "a disk that is pulled out is no trouble of the kernel")
    sh("modprobe scsi_debug dev_size_mb=16 max_queue=1 vpd_use_hostno=0")
    node = "/dev/" + sh("ls /sys/bus/pseudo/drivers/scsi_debug/adapter0/host*/target*/*/block | tail -1")
    say(f"       a made disk at {node}")
    watching.stop()
    watching.start()
    time.sleep(12)
    sh(f"echo 2 >/sys/block/{node[5:]}/device/timeout; echo 1 >/sys/block/{node[5:]}/device/eh_timeout")
    sh("echo 4 >/sys/bus/pseudo/drivers/scsi_debug/opts; echo 1 >/sys/bus/pseudo/drivers/scsi_debug/every_nth")
    sh(f"timeout 120 dd if={node} of=/dev/null bs=512 skip=512 count=1 iflag=direct", check=False)
    sh("echo 0 >/sys/bus/pseudo/drivers/scsi_debug/opts; echo 0 >/sys/bus/pseudo/drivers/scsi_debug/every_nth")
    wait(
        "offlined: told",
        lambda: any(one.data["event"] == "device-offlined" for _, one in watching.events()),
        60,
    )
    made = [entry for _, entry in watching.events() if entry.data["event"] == "device-offlined"]
    check(len(made) == 1, f"a disk that was given up is told once: {[one.text for one in made]}")


def self_test(watching: Watching) -> None:
    """The SATA disk tests itself at night, since the owner asks for it."""
    watching.stop()
    watching.settings.write_text(SETTINGS.replace("20m", "15s") + '[selftest]\nshort = "1d"\n')
    sh("date -s 03:10:00")
    watching.start()

    def ended() -> list[str]:
        with Past.open(watching.folder) as past:
            book = past.day_book(drive=watching.lines()[SERIALS["hdd"]].number, kinds={"self-test"})
        return [entry.text for entry in book]

    wait("hdd: tested", lambda: len(ended()) >= 2, 180)
    say(f"       {ended()}")
    check(ended()[:1] == ["A short self-test of it began."], "the SATA disk began to test itself")
    check("ended: Completed without error" in " ".join(ended()[1:]), "its result is told")


def main() -> None:
    """Run all, one after the other."""
    watching = Watching()
    wait("the first round", lambda: len(watching.lines()) >= len(SERIALS), 120)
    bad_sectors(watching)
    passing(watching)
    array(watching)
    file_system(watching)
    vanishing(watching)
    self_test(watching)
    watching.stop()
    for serial, entry in watching.events():
        say(f"       {serial}: {entry.text}")
    end()


main()
