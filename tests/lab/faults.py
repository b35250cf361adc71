"""Disks that are slow, fail, warn or hang: what the counters, the readings and the day book say of it."""

import os
import subprocess
import sys
import time

from diskwatch.errors import DiskwatchError
from diskwatch.history.reader import Past
from diskwatch.machine import counters
from diskwatch.records import IoCounts
from tests.lab.bench import HERE, Bench, Smartctl, check, end, lab, say, sh, wait

SETTINGS = """
[smart]
command = "{command}"
every = "15s"
timeout = "10s"
[io]
every = "10s"
"""


def over(block: str, command: str) -> IoCounts:
    """What a disk's counters say of a command."""
    before = counters.counts()
    sh(command, check=False)
    done = counters.traffic((block,), before, counters.counts())
    assert done is not None
    return done


def slow() -> None:
    """The time of a read shows how slow a disk is."""
    node = lab("dev", "nvme")
    read = f"dd if={node} of=/dev/null bs=4k count=40 iflag=direct status=none"
    quick = over(node[5:], read)
    lab("slow", "nvme", "20")
    sluggish = over(node[5:], read)
    lab("fast", "nvme")
    means = [one.read_ms / one.reads for one in (quick, sluggish)]
    say(f"       {quick.reads} reads of {means[0]:.1f} ms; slowed down {sluggish.reads} of {means[1]:.1f} ms")
    check(means[1] > 30 > means[0], "a disk that is slow is seen to be")


def failing() -> None:
    """A read that fails is counted as one that completed."""
    node = lab("dev", "hdd")
    lab("bad", "hdd", "2048")
    done = over(node[5:], f"dd if={node} of=/dev/null bs=512 skip=2048 count=1 iflag=direct")
    lab("good", "hdd")
    say(f"       one failed read: {done.reads} reads, {done.read_bytes} bytes, {done.read_ms} ms")
    check(done.reads >= 1 and done.read_bytes >= 512, "a read that failed counts as completed")
    write = f"dd if=/dev/zero of={node} bs=4k seek=256 count=8 oflag=direct conv=fsync"
    done = over(node[5:], f"{write}; blkdiscard -f {node}")
    say(f"       8 writes, a flush, and what else there was: {done}")
    check(
        done.writes >= 8 and done.write_bytes == 32768 and (done.flushes or 0) >= 1,
        "writes and flushes are counted",
    )


def warning(bench: Bench) -> None:
    """The warning byte of an NVMe drive comes through, and goes."""
    for bits in ("8", "0"):
        lab("warn", bits)
        one = bench.round()["LABNVME001"]
        told = one.pass_.reading.values if one.pass_.reading is not None else ()
        byte = [value.value for value in told if value.signal == "critical-warning"]
        call = f"{one.call.word.value}: {one.call.reason}" if one.call is not None else "no call"
        say(f"       warning {bits}: {byte}, {call}")
        check(byte == [int(bits)], f"warning byte {bits} is read as such")


class Watching:
    """The service itself, in a process of its own."""

    def __init__(self, name: str) -> None:
        self.smartctl = Smartctl()
        self.folder = HERE / name
        settings = HERE / "settings.toml"
        settings.write_text(SETTINGS.format(command=self.smartctl.command))
        command = [
            sys.executable,
            "-m",
            "diskwatch",
            "watch",
            "--state",
            str(self.folder),
            "--settings",
            str(settings),
        ]
        self.process = subprocess.Popen(command, env=dict(os.environ), stdout=subprocess.DEVNULL)

    def begun(self) -> bool:
        """Whether there is a history yet."""
        try:
            return bool(self.numbers())
        except DiskwatchError:
            return False

    def told(self, kind: str = "trouble") -> list[str]:
        """Lines of the day book of one kind, newest last."""
        with Past.open(self.folder) as past:
            return [f"{entry.drive}: {entry.text}" for entry in past.day_book() if entry.kind == kind]

    def numbers(self) -> dict[str, int]:
        """Each drive's number by its serial."""
        with Past.open(self.folder) as past:
            return {
                line.drive.identity.serial or "": line.number for line in past.bays(int(time.time())).drives
            }

    def last_pass(self, serial: str) -> int:
        """When a drive was last asked."""
        with Past.open(self.folder) as past:
            for line in past.bays(int(time.time())).drives:
                if line.drive.identity.serial == serial and line.last_pass is not None:
                    return line.last_pass.at
        return 0

    def traffic(self, serial: str) -> bool:
        """Whether whoever looks now is shown a drive's traffic."""
        with Past.open(self.folder) as past:
            lines = past.bays(int(time.time())).drives
        return any(line.traffic is not None for line in lines if line.drive.identity.serial == serial)


def hang(watching: Watching, name: str, number: int) -> None:
    """One disk that hangs while another works."""
    node, other = lab("dev", name), lab("dev", "ssd")
    sh(f"mkfs.ext4 -q -F {node}; mkdir -p /run/hung; mount {node} /run/hung; echo x >/run/hung/x; sync")
    lab("hang", name)
    # The disk answers one more request, and then none.
    reads = [
        subprocess.Popen(["dd", f"if={node}", "of=/dev/null", f"skip={64 * at}", "count=4", "iflag=direct"])
        for at in (1, 2, 3)
    ]
    begun = time.time()
    work = f"while sleep 0.5; do dd if={other} of=/dev/null bs=4k count=8 iflag=direct status=none; done"
    load = subprocess.Popen(["sh", "-c", work])
    said, over_ = f"{number}: Requests to it have not moved", f"{number}: Requests to it move again"
    took = wait(f"{name}: told", lambda: any(one.startswith(said) for one in watching.told()), 90)
    say(f"       {name}: told after {took:.0f} s: {watching.told()[-1]}")
    check(took <= 60, f"{name}: a disk that hangs is told within a minute")
    watching.smartctl.started()
    wait("others are asked", lambda: watching.last_pass("LABSSD0001") > begun + 45, 60)
    check(watching.traffic("LABSSD0001"), "the traffic of others is measured all the while")
    asked = [line for line in watching.smartctl.started() if line.endswith(node.removesuffix("n1"))]
    check(not asked, f"{name}: not asked while it hangs ({len(asked)} processes)")
    lab("fast", name)
    took = wait(f"{name}: over", lambda: any(one.startswith(over_) for one in watching.told()), 90)
    say(f"       {name}: over told after {took:.0f} s: {watching.told()[-1]}")
    load.terminate()
    for process in reads:
        process.wait()
    sh("umount /run/hung", check=False)


def hanging() -> None:
    """A disk that hangs is told within a minute, is left alone, and keeps nobody from going on."""
    watching = Watching("hanging")
    wait("the first round", lambda: watching.begun() and watching.last_pass("LABHDD0001"), 90)
    numbers = watching.numbers()
    say(f"       {numbers}")
    for name, serial in (("vblk", "LABVBLK001"), ("scsi", "LABSAS0001"), ("nvme", "LABNVME001")):
        hang(watching, name, numbers[serial])
    told = watching.told()
    counts = [sum(part in text for text in told) for part in ("have not moved for", "move again")]
    check(counts == [3, 3], f"each is told once when it begins and once when it is over: {counts}")
    watching.process.terminate()
    check(watching.process.wait(20) == 0, "the watch ends well")
    for text in told:
        say(f"       {text}")


def main() -> None:
    """Run all four."""
    slow()
    failing()
    warning(Bench("warning"))
    hanging()
    end()


main()
