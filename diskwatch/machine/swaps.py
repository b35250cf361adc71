"""Swap space on a drive: no file system, but it fails with the drive all the same."""

import re
from pathlib import Path

from diskwatch.machine.kernel_files import whole_of
from diskwatch.machine.mounts import unescaped
from diskwatch.machine.nodes import kernel_name
from diskwatch.machine.stacks import Stack
from diskwatch.records import Mount

_LINE = re.compile(r"(?P<path>/\S*)\s+partition\s+(?P<size>\d+)\s+(?P<used>\d+)\s+-?\d+")


def swap_on(
    stack: Stack,
    proc_root: Path = Path("/proc"),
    *,
    sys_root: Path = Path("/sys"),
    dev_root: Path = Path("/dev"),
) -> tuple[Mount, ...]:
    """The swap space on a drive, all of it as one; empty where there is none.

    A swap file is left out: it is counted in the file system that it lies in already.

    Args:
        stack: the drive and all that is made of it.
        proc_root: where procfs is mounted; ``swaps`` counts in KiB there (Linux, proc(5)).
        sys_root: where sysfs is mounted.
        dev_root: where device nodes are.
    """
    told = (_LINE.fullmatch(line.strip()) for line in (whole_of(proc_root / "swaps") or "").splitlines())
    here = [
        line
        for line in told
        if line is not None and kernel_name(unescaped(line["path"]), sys_root, dev_root) in stack.names
    ]
    if not here:
        return ()
    return (
        Mount(
            point="swap",
            used_bytes=sum(int(line["used"]) for line in here) * 1024,
            total_bytes=sum(int(line["size"]) for line in here) * 1024,
        ),
    )
