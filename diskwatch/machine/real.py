"""This computer, joined from its parts: the kernel's files, its counters, and smartctl."""

import time
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from diskwatch.machine import counters
from diskwatch.machine.blocks import physical_drives
from diskwatch.machine.choice import asked
from diskwatch.machine.disks import asleep
from diskwatch.machine.kernel_files import names_in, text_of
from diskwatch.machine.mounts import MountLine, living_on, measured, mount_lines
from diskwatch.machine.patience import Patience
from diskwatch.machine.protocol import Counted, Found, Survey
from diskwatch.machine.smartctl import Smartctl
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.survey import joined
from diskwatch.machine.swaps import swap_on
from diskwatch.machine.zfs import pools
from diskwatch.records import Drive, Kind, Mount, Outcome, Pass, Way


def _wall_clock() -> int:
    return int(time.time())


class RealMachine:
    """The computer that this program runs on; see `diskwatch.machine.protocol.Machine`.

    It remembers, while a device's instance lasts, what a drive said of itself: behind a USB bridge the kernel
    alone knows another name, or none, and a drive that has fallen asleep must not become a new one.
    """

    def __init__(
        self,
        *,
        command: str = "smartctl",
        timeout: float = 60.0,
        only: tuple[str, ...] = (),
        ignore: tuple[str, ...] = (),
        ways: Iterable[Way] = (),
        sys_root: Path = Path("/sys"),
        proc_root: Path = Path("/proc"),
        dev_root: Path = Path("/dev"),
        now: Callable[[], int] = _wall_clock,
    ) -> None:
        """Nothing is read yet.

        Args:
            command: the smartctl command, a path or a name on PATH.
            timeout: seconds that one drive may take to answer.
            only: watch these and no others; a serial, world-wide name or device each; none means all.
            ignore: leave these alone.
            ways: what earlier passes found out of USB adapters, see `diskwatch.records.Pass.way`.
            sys_root: where sysfs is mounted.
            proc_root: where procfs is mounted.
            dev_root: where device nodes are.
            now: UTC seconds since 1970.
        """
        self._smartctl = Smartctl(command, timeout, now, kept=ways)
        self._only, self._ignore = only, ignore
        self._sys, self._proc, self._dev = sys_root, proc_root, dev_root
        self._now = now
        self._measure = Patience(measured)
        self._said: dict[str, Drive] = {}
        self._without_smart: set[str] = set()

    def survey(self) -> Survey:
        """List the physical drives with what lives on them; no drive is opened."""
        scan = self._smartctl.scan()
        listed = names_in(self._sys / "block")
        troubles = [scan.trouble] if scan.trouble is not None else []
        if not listed:
            troubles.append(
                f"{self._sys / 'block'} lists no block device, so drives may be missing: "
                "check that sysfs is mounted there and may be read."
            )
        mounted = mount_lines(self._proc), pools(self._proc)
        found = []
        for one in joined(physical_drives(self._sys), scan.entries, listed):
            bare = replace(one, instance=self._instance(one))
            said = self._said.get(bare.instance)
            drive = replace(bare, drive=_at(said, bare)) if said is not None else bare
            if not self._is_asked(drive, said_itself=said is not None):
                continue
            lives_here = self._living_on(drive, *mounted)
            found.append(replace(drive, place=replace(drive.place, lives_here=lives_here)))
        return Survey(found=tuple(found), troubles=tuple(troubles))

    def ask(self, found: Found) -> Pass:
        """Ask one drive, unless that would wake it or the kernel shows that it has nothing to say."""
        # Looked at anew: since the survey, the drives before it may have taken minutes.
        if found.asleep or any(asleep(self._sys, block) for block in found.blocks):
            return Pass(
                at=self._now(),
                outcome=Outcome.ASLEEP,
                explanation="It is suspended by the kernel and was not asked, since that would wake it.",
            )
        instance = self._instance(found)
        if instance in self._without_smart:
            return _no_smart(found, Pass(at=self._now(), outcome=Outcome.NO_SMART))
        answer = self._smartctl.ask(found, completed=lambda: self._completed(found))
        if answer.drive is not None:
            self._said[instance] = answer.drive
        if found.expects_smart or answer.outcome in {Outcome.READ, Outcome.NO_TOOL}:
            return answer  # a surprise is welcome; without the tool nothing was asked yet
        self._without_smart.add(instance)
        return _no_smart(found, answer)

    def begin_test(self, found: Found, *, extended: bool) -> str | None:
        """Have a drive test itself, unless that would wake it; None where the test began, else why not."""
        if any(asleep(self._sys, block) for block in found.blocks):
            return "it is suspended by the kernel and was not asked, since that would wake it."
        return self._smartctl.begin_test(found, extended=extended)

    def counts(self) -> Mapping[str, Counted]:
        """Traffic totals by kernel name of the block device."""
        return counters.counts(self._sys, self._proc)

    def stop(self) -> None:
        """End every question that is still under way, at once."""
        self._smartctl.stop()

    def _living_on(
        self, drive: Found, lines: Sequence[MountLine], pools: Mapping[str, bool]
    ) -> tuple[Mount, ...]:
        stack = stack_on(self._sys, drive.blocks, dev_root=self._dev)
        mounts = living_on(
            stack,
            lines,
            sys_root=self._sys,
            dev_root=self._dev,
            measure=None if drive.asleep else self._measure,
            pools=pools,
        )
        return (*mounts, *swap_on(stack, self._proc, sys_root=self._sys, dev_root=self._dev))

    def _instance(self, found: Found) -> str:
        """Behind a controller the kernel knows no instance; there the place has to do."""
        if not found.blocks:
            return found.place.device
        boot = text_of(self._proc / "sys" / "kernel" / "random" / "boot_id")
        return counters.instance_of(self._sys, boot, found.blocks[0])

    def _completed(self, found: Found) -> int | None:
        """Requests to all of a drive's block devices that came to an end, questions like ours not among them.

        None where any is not counted, or where the kernel was told to count questions as well.
        """
        if not found.blocks or any(counters.counts_questions(self._sys, block) for block in found.blocks):
            return None
        counted = self.counts()
        if any(block not in counted for block in found.blocks):
            return None
        return sum(counters.completed(counted[block].counts) for block in found.blocks)

    def _is_asked(self, found: Found, *, said_itself: bool) -> bool:
        drive = found.drive
        settled = said_itself or (drive.identity.serial is not None and drive.kind is not Kind.USB)
        return asked(found, settled=settled, only=self._only, ignore=self._ignore)


def _no_smart(found: Found, answer: Pass) -> Pass:
    """An answer in the words of one who knows from the kernel that there is nothing to be had."""
    what = "a virtual disk" if found.drive.kind is Kind.VIRTUAL else "a memory card"
    return replace(
        answer,
        outcome=Outcome.NO_SMART,
        explanation=f"It is {what} and has no SMART; its traffic is watched all the same.",
    )


def _at(said: Drive, found: Found) -> Drive:
    """What a drive said of itself, at the place where it is now."""
    return replace(said, identity=replace(said.identity, path=found.place.device))
