"""Drives that come, go and change place: whether each history follows its drive, and no other's."""

import time

from diskwatch.records import Outcome
from tests.lab.bench import Bench, check, end, lab, say, sh, wait


def present(serial: str) -> bool:
    """Whether the kernel shows a disk of this serial."""
    return serial in sh("lsblk -dnPo NAME,SERIAL").replace('"', " ").split()


def plug(name: str, serial: str, more: str = "") -> None:
    """Put a disk in, and wait until it is there."""
    lab("plug", name, *([more] if more else []))
    wait(f"{name}: there", lambda: present(serial))
    time.sleep(1)


def unplug(name: str, serial: str) -> None:
    """Take a disk out, and wait until it is gone."""
    lab("unplug", name)
    wait(f"{name}: away", lambda: not present(serial))


def hot(bench: Bench, name: str, serial: str, numbers: dict[str, int]) -> None:
    """A disk away and back; another in its place; the first again."""
    node, other = lab("dev", name), f"OTHER{name.upper()}"
    unplug(name, serial)
    check(bench.round()[serial].pass_.outcome is Outcome.ABSENT, f"{name} unplugged: said to be absent")
    plug(name, serial)
    back = bench.round()[serial]
    check(back.known.number == numbers[serial], f"{name} plugged in again: its history goes on")
    say(f"       was {node}, is {lab('dev', name)}; {back.pass_.outcome.value}")
    unplug(name, serial)
    plug(name, other, f'{{"serial": "{other}"}}')
    done = bench.round()
    new = done[other].known.number
    check(new not in numbers.values(), f"another {name} at the same place: a history of its own")
    check(done[serial].pass_.outcome is Outcome.ABSENT, f"the first {name}: said to be absent")
    unplug(name, other)
    plug(name, serial)
    check(bench.round()[serial].known.number == numbers[serial], f"the first {name} again: its history goes on")


def lettered(bench: Bench, name: str, serial: str, numbers: dict[str, int]) -> None:
    """A SATA disk taken off its port and found again, while another disk takes its letter."""
    node = lab("dev", name)
    host = sh(f"readlink -f /sys/block/{node[5:]} | grep -o 'host[0-9]*' | head -1")
    sh(f"echo 1 >/sys/block/{node[5:]}/device/delete")
    unplug("usb", "LABUSB0001")
    plug("usb", "LABUSB0001")
    gone, usb = bench.round(), lab("dev", "usb")
    check(gone[serial].pass_.outcome is Outcome.ABSENT, f"{name} taken off its port: said to be absent")
    check(
        gone["LABUSB0001"].known.number == numbers["LABUSB0001"],
        f"the usb disk, now {usb}: its history goes on",
    )
    sh(f"echo '- - -' >/sys/class/scsi_host/{host}/scan")
    wait(f"{name}: back", lambda: present(serial))
    time.sleep(1)
    back, now = bench.round()[serial], lab("dev", name)
    check(back.known.number == numbers[serial], f"{name}: was {node}, is {now}: its history goes on")
    check(back.pass_.outcome is Outcome.READ, f"{name}: read at its new letter")


def main() -> None:
    """All that can be plugged, and both SATA disks."""
    bench = Bench("plugging")
    numbers = {serial: one.known.number for serial, one in bench.round().items()}
    say(f"       {numbers}")
    for name, serial in (("nvme", "LABNVME001"), ("usb", "LABUSB0001"), ("vblk", "LABVBLK001")):
        hot(bench, name, serial, numbers)
    for name, serial in (("hdd", "LABHDD0001"), ("ssd", "LABSSD0001")):
        lettered(bench, name, serial, numbers)
    # The machine gives a USB disk that is plugged in another port each time.
    moved = {entry.drive for entry in bench.book() if entry.kind == "moved"}
    check(moved <= {numbers["LABUSB0001"]}, f"only the usb disk is said to have moved: {moved}")
    for entry in bench.book():
        say(f"       {entry.kind} {entry.drive} {entry.text}")
    end()


main()
