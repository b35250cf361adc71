"""The six disks of the guest: who they are, how many processes it took to find out, and twins of one name."""

import json

from diskwatch.records import Kind, Outcome
from tests.lab.bench import Bench, check, end, lab, say, sh, wait

# As the guest is set up; None where it has no world-wide name, "" where it makes one up. Three of the six say
# by their model that they are emulated; the others pass for what they play.
EXPECTED = {
    "hdd": ("LABHDD0001", "naa.5000c500a0000001", Kind.HDD),
    "ssd": ("LABSSD0001", "naa.5000c500a0000002", Kind.SSD),
    "nvme": ("LABNVME001", "", Kind.VIRTUAL),
    "usb": ("LABUSB0001", None, Kind.VIRTUAL),
    "vblk": ("LABVBLK001", None, Kind.VIRTUAL),
    "scsi": ("LABSAS0001", "naa.5000c500a0000003", Kind.SAS),
}


def twins(bench: Bench, numbers: dict[str, int]) -> None:
    """Two disks that tell one world-wide name: the SCSI disk comes back as a twin of the SATA disk."""
    lab("unplug", "scsi")
    wait("scsi: away", lambda: "LABSAS0001" not in sh("lsblk -dno SERIAL"))
    lab("plug", "scsi", json.dumps({"serial": "LABTWIN001", "wwn": 0x5000C500A0000001}))
    wait("scsi: back", lambda: "LABTWIN001" in sh("lsblk -dno SERIAL"))
    sh("udevadm settle")
    links = sh("ls /dev/disk/by-id | grep -c wwn-0x5000c500a0000001", check=False)
    rounds = []
    for _ in range(2):
        done = bench.round()
        both = [done[serial] for serial in ("LABHDD0001", "LABTWIN001")]
        rounds.append([one.known.number for one in both])
        told = [(one.known.place.device, one.known.drive.identity.wwn) for one in both]
        say(f"       {told}; {links} link by that name")
    check(len({one.known.drive.identity.wwn for one in both}) == 1, "two disks tell one world-wide name")
    check(rounds[0][0] == numbers["LABHDD0001"], "the first keeps its history")
    check(rounds[0][1] not in numbers.values(), "the second has a history of its own")
    check(rounds[0] == rounds[1], "and so it stays")


def main() -> None:
    """Two rounds, of which the second must find the same drives; then two more with twins."""
    bench = Bench("identities")
    first, started = bench.round(), bench.smartctl.started()
    for name, (serial, wwn, kind) in EXPECTED.items():
        one = first.get(serial)
        check(one is not None, f"{name}: found by its serial {serial}")
        if one is None:
            continue
        drive, node = one.known.drive, lab("dev", name)
        say(f"       {node} {drive.kind.value} {drive.identity} bay {one.known.place.bay}")
        say(f"       {one.pass_.outcome.value}: {one.pass_.explanation}")
        told = one.pass_.reading.values if one.pass_.reading is not None else ()
        say(f"       {len(told)} signals, {one.pass_.took_ms} ms")
        check(one.known.place.device.startswith(node.removesuffix("n1")), f"{name}: at {node}")
        check(drive.identity.wwn == wwn if wwn != "" else drive.identity.wwn, f"{name}: world-wide name {wwn}")
        check(drive.kind is kind, f"{name}: is of the kind {kind.value}")
        check(one.pass_.outcome in {Outcome.READ, Outcome.NO_SMART}, f"{name}: read, or known to have no SMART")
    check(len(started) <= len(first), f"{len(started)} processes for {len(first)} drives")
    for line in started:
        say(f"       smartctl {line}")
    second, started = bench.round(), bench.smartctl.started()
    for line in started:
        say(f"       smartctl {line}")
    same = {serial: one.known.number for serial, one in second.items()}
    before = {serial: one.known.number for serial, one in first.items()}
    check(same == before, "the second round finds the same drives")
    check(len(started) <= len(second), f"{len(started)} processes in the second round for {len(second)} drives")
    twins(bench, same)
    end()


main()
