"""Which of this computer's drives is one that the history speaks of; and which drives a folder lies on.

A history may speak of drives that are long gone, of another machine's or of invented ones: what is asked of the
kernel about a drive must be asked of that very one, or not at all.
"""

import os
from collections.abc import Iterable
from pathlib import Path

from diskwatch.machine.identity import same
from diskwatch.machine.mounts import MountLine, living_on, mount_lines
from diskwatch.machine.protocol import Found
from diskwatch.machine.stacks import stack_on
from diskwatch.machine.zfs import pools
from diskwatch.records import Drive, Place


def found_of(drive: Drive, place: Place, found: Iterable[Found]) -> Found | None:
    """The drive of this computer that is meant, or None.

    Behind an adapter the kernel knows another name than the drive says of itself: there device, bay and size
    must all be equal.

    Args:
        drive: as the history knows it.
        place: where the history saw it last.
        found: the drives of this computer (`diskwatch.machine.blocks.physical_drives`).
    """
    every = tuple(found)
    meant = [one for one in every if same(one.drive.identity, drive.identity)]
    if not meant:
        meant = [one for one in every if _there(one, drive, place)]
    return meant[0] if len(meant) == 1 else None


def _there(found: Found, drive: Drive, place: Place) -> bool:
    return (
        place.bay is not None
        and found.place.bay == place.bay
        and found.place.device == place.device
        and drive.capacity_bytes is not None
        and found.drive.capacity_bytes == drive.capacity_bytes
    )


def lies_on(
    folder: Path,
    found: Found,
    *,
    sys_root: Path = Path("/sys"),
    proc_root: Path = Path("/proc"),
    dev_root: Path = Path("/dev"),
) -> bool:
    """Whether a folder, or where it is not there yet what it would be made in, lies on a drive.

    Args:
        folder: which folder.
        found: the drive.
        sys_root: where sysfs is mounted.
        proc_root: where procfs is mounted.
        dev_root: where device nodes are; none is opened.
    """
    point = mount_of(folder, mount_lines(proc_root))
    if point is None:
        return False
    stack = stack_on(sys_root, found.blocks, dev_root=dev_root)
    lines = [line for line in mount_lines(proc_root) if line.point == point.point]
    return bool(living_on(stack, lines, sys_root=sys_root, dev_root=dev_root, pools=pools(proc_root)))


def mount_of(folder: Path, lines: Iterable[MountLine]) -> MountLine | None:
    """The mount that a folder lies in; of several on one point the last, which covers the others."""
    real = os.path.realpath(folder)
    holding = [line for line in lines if real == line.point or real.startswith(line.point.rstrip("/") + "/")]
    longest = max((len(line.point) for line in holding), default=0)
    return next((line for line in reversed(holding) if len(line.point) == longest), None)
