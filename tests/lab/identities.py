"""The six disks of the guest: who they say they are, and how many processes it took to find out."""

from diskwatch.records import Kind, Outcome
from tests.lab.bench import Bench, check, end, lab, say

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


def main() -> None:
    """Two rounds; the second must find the same drives."""
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
    end()


main()
