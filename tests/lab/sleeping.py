"""Drives that sleep: asked once at most, and not woken."""

import time

from diskwatch.records import Outcome
from tests.lab.bench import Bench, check, end, lab, say, sh, wait


def stopped(generic: str) -> bool:
    """Whether a SCSI disk is stopped; asked by its sg node, since opening the sd node starts it."""
    return "not ready" in sh(f"sg_turs -v {generic} 2>&1", check=False).lower()


def suspend(node: str) -> str:
    """Let the kernel suspend a disk that does nothing for a second; the folder of its power state."""
    power = f"/sys/block/{node[5:]}/device/power"
    sh(f"echo 1000 >{power}/autosuspend_delay_ms; echo auto >{power}/control")
    wait(f"{node}: suspended", lambda: sh(f"cat {power}/runtime_status") == "suspended")
    return power


def by_kernel(bench: Bench) -> None:
    """Disks that the kernel has suspended are not asked at all."""
    for name, serial in (("scsi", "LABSAS0001"), ("ssd", "LABSSD0001")):
        node = lab("dev", name)
        bench.round()
        bench.smartctl.started()
        power = suspend(node)
        done = bench.round()[serial].pass_
        say(f"       {done.outcome.value}: {done.explanation}")
        started = [line for line in bench.smartctl.started() if line.endswith(node)]
        check(done.outcome is Outcome.ASLEEP, f"{name} suspended by the kernel: known to be asleep")
        check(not started, f"{name}: {len(started)} processes for it")
        time.sleep(2)
        check(sh(f"cat {power}/runtime_status") == "suspended", f"{name}: suspended still")
        sh(f"dd if={node} of=/dev/null bs=4k count=1 iflag=direct status=none; echo on >{power}/control")
        check(
            bench.round()[serial].pass_.outcome is not Outcome.ASLEEP, f"{name}: asked again once it is awake"
        )


def by_itself(bench: Bench) -> None:
    """A SCSI disk that has stopped by itself: one question finds that out, and it stays stopped."""
    before = set(sh("ls /sys/block").split())
    sh("modprobe scsi_debug dev_size_mb=16; udevadm settle")
    (block,) = set(sh("ls /sys/block").split()) - before
    generic = "/dev/" + sh(f"ls /sys/block/{block}/device/scsi_generic")
    first = next(one for one in bench.round().values() if one.known.place.device == f"/dev/{block}")
    say(f"       awake: {first.pass_.outcome.value}: {first.pass_.explanation}; {first.known.drive.identity}")
    sh(f"sg_start --stop {generic}")
    check(stopped(generic), "the disk is stopped")
    for turn in ("first", "second"):
        bench.smartctl.started()
        done = next(one for one in bench.round().values() if one.known.place.device == f"/dev/{block}")
        started = [line for line in bench.smartctl.started() if line.endswith(block)]
        say(f"       {done.pass_.outcome.value}: {done.pass_.explanation}; smartctl {started}")
        check(done.pass_.outcome is Outcome.ASLEEP, f"{turn} round: it is found asleep")
        check(len(started) == 1, f"{turn} round: {len(started)} process for it")
        check(done.known.number == first.known.number, f"{turn} round: it is the same drive")
        check(stopped(generic), f"{turn} round: it is stopped still")
    sh(f"sg_start --start {generic}")
    done = next(one for one in bench.round().values() if one.known.place.device == f"/dev/{block}")
    check(done.pass_.outcome is first.pass_.outcome, f"started again: {done.pass_.outcome.value} as before")
    sh("udevadm settle; rmmod scsi_debug", check=False)


def main() -> None:
    """Run both."""
    bench = Bench("sleeping")
    by_kernel(bench)
    by_itself(bench)
    end()


main()
