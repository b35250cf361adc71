"""Disks with bad sectors, and an array that loses a member: what the watch hears besides their own word."""

import time
from functools import partial

from tests.lab.bench import check, lab, say, sh, wait
from tests.lab.hearing import SERIALS, Watching, ended, watching as begun

BAD = {"hdd": 2048, "nvme": 4096, "usb": 6144, "scsi": 8192, "vblk": 10240}


def bad_sectors(watching: Watching) -> None:
    """One read of a bad sector on each disk, and a restart behind it."""
    for name, sector in BAD.items():
        lab("bad", name, str(sector))
        node = lab("dev", name)
        sh(f"dd if={node} of=/dev/null bs=512 skip={sector} count=1 iflag=direct", check=False)
        sh(f"dd if={node} of=/dev/null bs=4k skip={sector // 8} count=1", check=False)
        lab("good", name)
    for name in BAD:
        wait(f"{name}: told", partial(watching.told, name, "unreadable-sector"), 60)
    for name, sector in BAD.items():
        found = watching.told(name, "unreadable-sector")
        check([one.data["sector"] for one in found] == [sector], f"{name}: one event, at sector {sector}")
    others = {serial for serial, _ in watching.events()} - {SERIALS[name] for name in BAD}
    check(not others, f"no other drive is accused {others}")
    for name in BAD:
        wait(f"{name}: judged", partial(_is_look, watching, name), 60)
        check(watching.call(name) == ("look", "fact:unreadable-sector"), f"{name}: {watching.call(name)}")
    check(watching.call("ssd")[0] == "keep", "the disk without trouble is kept")
    before = len(watching.events())
    watching.stop()
    watching.start()
    time.sleep(12)
    check(len(watching.events()) == before, f"a restart tells nothing twice: {before} events")


def _is_look(watching: Watching, name: str) -> bool:
    return watching.call(name)[0] == "look"


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
    wait("array: judged", lambda: "degraded-arrays" in watching.signals("vblk"), 60)
    say(f"       {watching.signals('vblk')}")
    sh("mdadm --stop /dev/md0; lab good vblk", check=False)


def main() -> None:
    """Run all, one after the other."""
    watching = begun()
    bad_sectors(watching)
    passing(watching)
    array(watching)
    ended(watching)


main()
