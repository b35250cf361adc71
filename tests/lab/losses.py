"""Disks that vanish or are given up, a file system in trouble, a self-test: what the watch hears of them."""

import time

from diskwatch.history.reader import Past
from tests.lab.bench import check, lab, say, sh, wait
from tests.lab.hearing import SERIALS, SETTINGS, Watching, ended as all_ended, watching as begun


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
    say(f"       {watching.signals('ssd').get('ext4-errors')} errors counted by ext4")
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
    watching = begun()
    file_system(watching)
    vanishing(watching)
    self_test(watching)
    all_ended(watching)


main()
