"""What lives on a drive: the file systems of which at least a part lies there.

Read from the first process's mountinfo: a hardened service sees its own, altered mounts under its own number.
"""

import os
import re
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, whole_of
from diskwatch.machine.nodes import kernel_name
from diskwatch.machine.stacks import Stack
from diskwatch.machine.zfs import pool_on
from diskwatch.records import Mount

_NAMED_BY_SOURCE = frozenset({"btrfs", "bcachefs"})
"""File systems over several devices: mountinfo gives them a number that belongs to no device."""

_MAY_HANG = frozenset({"ocfs2", "gfs2"})
"""On a disk, but asking for their size asks other machines; fuse kinds ask a program that may be stuck."""

Measure = Callable[[str, str], tuple[int, int] | None]
"""Bytes used and in all of what is mounted at a point, where it is the file system of that number."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MountLine:
    """One line of mountinfo (Linux, proc(5)).

    Attributes:
        number: device number, ``8:2``; major 0 where it belongs to no device.
        root: which folder of the file system is mounted.
        point: where.
        type: sort of file system.
        source: device or other source, as the file system tells it.
    """

    number: str
    root: str
    point: str
    type: str
    source: str


def mount_lines(proc_root: Path = Path("/proc")) -> tuple[MountLine, ...]:
    """All mounts, as the first process sees them, else as this one does; later lines cover earlier ones."""
    for process in ("1", "self"):
        text = whole_of(proc_root / process / "mountinfo")
        if text:
            return parse(text)
    return ()


def parse(text: str) -> tuple[MountLine, ...]:
    """Read mountinfo; lines that are none are left out."""
    return tuple(line for raw in text.split("\n") if (line := _line(raw)) is not None)


def living_on(
    stack: Stack,
    lines: Sequence[MountLine],
    *,
    sys_root: Path = Path("/sys"),
    dev_root: Path = Path("/dev"),
    measure: Measure | None = None,
    pools: Mapping[str, bool] | None = None,
) -> tuple[Mount, ...]:
    """The file systems on a drive.

    Args:
        stack: the drive and all that is made of it.
        lines: all mounts.
        sys_root: where sysfs is mounted.
        dev_root: where device nodes are; only links there are followed, no node is opened.
        measure: how to ask for sizes; None leaves them unknown, as for a drive that must not be woken.
        pools: the ZFS pools (`diskwatch.machine.zfs.pools`).

    Returns:
        Shortest path first. Of several mounts of the same files (bind mounts) one stands for all. Several parts
        of one file system (subvolumes) are listed each, but its size stands with the first only, so that a sum
        over the drive counts nothing twice. The file systems of a ZFS pool share their room: each has what it
        uses, and only the first the room as well.
    """
    pool = pool_on(stack, pools or {})
    visible = {line.point: line for line in lines}  # a later mount on the same point hides the earlier
    groups: dict[str, list[MountLine]] = {}
    for line in visible.values():
        if _lies_on(line, stack, sys_root, dev_root) or (pool is not None and _is_of(line, pool)):
            groups.setdefault(line.number, []).append(line)
    mounts: list[Mount] = []
    shared: list[Mount] = []
    for group in groups.values():
        zfs = group[0].type == "zfs"
        suspended = zfs and not (pools or {}).get(pool or "", False)
        (shared if zfs else mounts).extend(_told(_without_binds(group), None if suspended else measure))
    return tuple(sorted((*mounts, *_once(sorted(shared, key=_by_length))), key=_by_length))


def measured(point: str, number: str) -> tuple[int, int] | None:
    """Ask the kernel for bytes used and in all; None where it refuses, or another file system answers there."""
    try:
        device = Path(point).stat().st_dev
        if not number.startswith("0:") and f"{os.major(device)}:{os.minor(device)}" != number:
            return None  # covered by another mount, or not to be seen from this process
        told = os.statvfs(point)
    except (OSError, ValueError):
        return None
    if told.f_blocks == 0:
        return None
    return (told.f_blocks - told.f_bfree) * told.f_frsize, told.f_blocks * told.f_frsize


def _line(raw: str) -> MountLine | None:
    before, dash, after = raw.partition(" - ")
    front, back = before.split(" "), after.split(" ")
    if not dash or len(front) < 6 or len(back) < 2 or not re.fullmatch(r"\d+:\d+", front[2]):
        return None
    return MountLine(
        number=front[2],
        root=unescaped(front[3]),
        point=unescaped(front[4]),
        type=back[0],
        source=unescaped(back[1]),
    )


def unescaped(text: str) -> str:
    r"""A path as it is: blanks, tabs, line ends and backslashes stand as ``\040`` and the like in /proc."""
    return re.sub(r"\\([0-3][0-7]{2})", lambda found: chr(int(found[1], 8)), text)


def _is_of(line: MountLine, pool: str) -> bool:
    return line.type == "zfs" and line.source.partition("/")[0] == pool


def _once(shared: Sequence[Mount]) -> list[Mount]:
    """File systems that share their room, which stands with the first only."""
    return [mount if index == 0 else replace(mount, total_bytes=None) for index, mount in enumerate(shared)]


def _by_length(mount: Mount) -> tuple[int, str]:
    return len(mount.point), mount.point


def _lies_on(line: MountLine, stack: Stack, sys_root: Path, dev_root: Path) -> bool:
    if line.number in stack.numbers:
        return True
    if line.type not in _NAMED_BY_SOURCE:
        return False
    devices = {kernel_name(source, sys_root, dev_root) for source in line.source.split(":")}
    if line.type == "btrfs":
        devices |= _members(devices, sys_root)
    return not stack.names.isdisjoint(devices)


def _members(devices: Iterable[str], sys_root: Path) -> set[str]:
    """All devices of the btrfs that one of these belongs to; mountinfo names only one."""
    wanted = set(devices)
    every: set[str] = set()
    for folder in names_in(sys_root / "fs" / "btrfs"):
        members = set(names_in(sys_root / "fs" / "btrfs" / folder / "devices"))
        if members & wanted:
            every |= members
    return every


def _without_binds(lines: Iterable[MountLine]) -> list[MountLine]:
    """One mount for the same files: the widest root first, then the shortest point."""
    kept: list[MountLine] = []
    for line in sorted(lines, key=lambda line: (len(line.root), len(line.point), line.point)):
        if not any(_within(line.root, other.root) for other in kept):
            kept.append(line)
    return sorted(kept, key=lambda line: (len(line.point), line.point))


def _within(root: str, other: str) -> bool:
    return root == other or root.startswith(other.rstrip("/") + "/")


def _told(lines: Sequence[MountLine], measure: Measure | None) -> list[Mount]:
    mounts = []
    for index, line in enumerate(lines):
        may_ask = index == 0 and not line.type.startswith("fuse") and line.type not in _MAY_HANG
        size = measure(line.point, line.number) if measure is not None and may_ask else None
        used, total = size if size is not None else (None, None)
        mounts.append(Mount(point=_writable(line.point), used_bytes=used, total_bytes=total))
    return mounts


def _writable(point: str) -> str:
    """A path whose bytes are no UTF-8 with those bytes spelt out, since no file or screen takes them raw."""
    return point.encode("utf-8", "surrogateescape").decode("utf-8", "backslashreplace")
