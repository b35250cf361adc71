"""The other senses of this computer, joined from their parts: its kernel's log, file systems, arrays, power."""

import time
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Protocol

from diskwatch.machine import zfs
from diskwatch.machine.kept_errors import kept_errors
from diskwatch.machine.kernel_line import Line
from diskwatch.machine.kernel_log import KernelLog
from diskwatch.machine.kernel_names import kernel_names
from diskwatch.machine.partitions import Piece, piece_at
from diskwatch.machine.power import on_battery
from diskwatch.machine.stacks import stack_on
from diskwatch.records import LeftOff, Value


class Log(Protocol):
    """A log that can be followed; see `diskwatch.machine.kernel_log.KernelLog`."""

    live: bool
    lost: int

    @property
    def left_off(self) -> LeftOff:
        """How far it has been read."""
        ...

    def fileno(self) -> int:
        """For ``poll``."""
        ...

    def read(self, most: int = 4_096) -> tuple[Line, ...]:
        """What has been said since; never waits."""
        ...

    def close(self) -> None:
        """Let go of it."""
        ...


class Senses(Protocol):
    """What the watch can learn of a computer's drives without asking them."""

    @property
    def source(self) -> str:
        """The path of its log."""
        ...

    def log(self, left_off: LeftOff | None) -> Log:
        """Open the log; raises `DiskwatchError` where it cannot be read."""
        ...

    def names(self, drives: Mapping[str, Iterable[str]]) -> Mapping[str, tuple[str, ...]]:
        """Drives by the names that the log may call them."""
        ...

    def kept(self, blocks: Iterable[str]) -> tuple[Value, ...]:
        """What file systems and arrays count of the drive with these block devices."""
        ...

    def piece_at(self, block: str, sector: int) -> Piece | None:
        """The partition that a sector of a disk lies in, or None."""
        ...

    def on_battery(self) -> bool:
        """Whether the computer runs on its battery."""
        ...

    def uptime(self) -> float:
        """Seconds since the boot, time asleep left out: the clock of the log's lines."""
        ...


class RealSenses:
    """Those of the computer that this program runs on."""

    def __init__(
        self,
        source: str,
        *,
        sys_root: Path = Path("/sys"),
        proc_root: Path = Path("/proc"),
        dev_root: Path = Path("/dev"),
    ) -> None:
        """Nothing is read yet.

        Args:
            source: ``/dev/kmsg`` or a file in its format.
            sys_root: where sysfs is mounted.
            proc_root: where procfs is mounted.
            dev_root: where device nodes are.
        """
        self.source = source
        self._sys, self._proc, self._dev = sys_root, proc_root, dev_root

    def log(self, left_off: LeftOff | None) -> KernelLog:
        """Open the kernel's log.

        Raises:
            DiskwatchError: it cannot be read.
        """
        return KernelLog(Path(self.source), left_off, proc_root=self._proc)

    def names(self, drives: Mapping[str, Iterable[str]]) -> Mapping[str, tuple[str, ...]]:
        """Drives by the names that the log may call them."""
        return kernel_names(drives, sys_root=self._sys, dev_root=self._dev)

    def kept(self, blocks: Iterable[str]) -> tuple[Value, ...]:
        """What file systems and arrays count of the drive with these block devices."""
        stack = stack_on(self._sys, blocks, dev_root=self._dev)
        return kept_errors(stack, sys_root=self._sys, pools=zfs.states(self._proc))

    def piece_at(self, block: str, sector: int) -> Piece | None:
        """The partition that a sector of a disk lies in, or None."""
        return piece_at(block, sector, sys_root=self._sys)

    def on_battery(self) -> bool:
        """Whether the computer runs on its battery."""
        return on_battery(self._sys)

    def uptime(self) -> float:
        """Seconds since the boot, time asleep left out."""
        return time.monotonic()
