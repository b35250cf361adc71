"""What of a drive's content its fellows in an array hold too, as far as the kernel shows it.

Sources: Linux, Documentation/admin-guide/md.rst (``level``, ``raid_disks``, ``degraded``, ``sync_action``) and
Documentation/ABI/testing/sysfs-fs-btrfs (``allocation/data/PROFILE``, ``devices``); that a device-mapper device
may be a mirror is seen from the prefix ``LVM-`` of its uuid and no further.
"""

from collections.abc import Mapping
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, number_of, text_of
from diskwatch.machine.stacks import Stack
from diskwatch.machine.zfs import pool_on
from diskwatch.records.array import Array

_SPARE = {"raid1": None, "raid4": 1, "raid5": 1, "raid6": 2}
"""How many members of an md array may be lost; of a mirror all but one (None), likewise md.rst."""

_KEEPS_TWICE = frozenset({"raid1", "raid1c3", "raid1c4", "raid10", "raid5", "raid6"})
"""Profiles of btrfs that outlive the loss of a device (btrfs(5)); ``dup`` lies on one device."""

_FILLS = frozenset({"recover", "resync", "reshape"})
_WRITTEN_OFTEN = ("data", "metadata")


def arrays_on(
    stack: Stack,
    *,
    sys_root: Path = Path("/sys"),
    pools: Mapping[str, bool] | None = None,
) -> tuple[Array, ...]:
    """All arrays of which a part lies on a drive; empty where the drive stands alone.

    Args:
        stack: the drive and all that is made of it.
        sys_root: where sysfs is mounted.
        pools: the ZFS pools (`diskwatch.machine.zfs.pools`).
    """
    md = [
        _md(sys_root, name, stack)
        for name in sorted(stack.names)
        if (sys_root / "block" / name / "md").is_dir()
    ]
    pool = pool_on(stack, pools or {})
    zfs = [] if pool is None else [Array(kind="zfs", name=pool)]
    return (*md, *_btrfs(stack, sys_root), *zfs, *_dm(stack, sys_root))


def _md(sys_root: Path, name: str, stack: Stack) -> Array:
    folder = sys_root / "block" / name / "md"
    here = len(stack.names & set(names_in(sys_root / "block" / name / "slaves")))
    level, members = text_of(folder / "level"), number_of(folder / "raid_disks")
    missing, action = number_of(folder / "degraded"), text_of(folder / "sync_action")
    filling = None if action is None else action in _FILLS
    elsewhere = _elsewhere(level, members, missing, max(1, here))
    return Array(
        kind="md",
        name=name,
        level=level,
        members=members,
        missing=missing,
        rebuilding=filling,
        # Members of an array that is brought into line for the first time hold what they held before.
        elsewhere=None if elsewhere and filling and not missing else elsewhere,
    )


def _elsewhere(level: str | None, members: int | None, missing: int | None, here: int) -> bool | None:
    """Whether an md array would outlive the loss of those of its members that lie on the drive."""
    if level in {"raid0", "linear"}:
        return False
    if members is None or missing is None:
        return None
    if level == "raid10":
        # With more than one gone it depends on which two make a pair.
        return True if missing + here == 1 else None
    if level not in _SPARE:
        return None
    spare = _SPARE[level]
    return missing + here <= (members - 1 if spare is None else spare)


def _btrfs(stack: Stack, sys_root: Path) -> list[Array]:
    found = []
    for uuid in names_in(sys_root / "fs" / "btrfs"):
        folder = sys_root / "fs" / "btrfs" / uuid
        devices = names_in(folder / "devices")
        if len(devices) < 2 or stack.names.isdisjoint(devices):
            continue
        profiles = {
            sort: {
                name
                for name in names_in(folder / "allocation" / sort)
                if (folder / "allocation" / sort / name).is_dir()
            }
            for sort in _WRITTEN_OFTEN
        }
        every = set().union(*profiles.values())
        found.append(
            Array(
                kind="btrfs",
                name=text_of(folder / "label") or uuid,
                level=", ".join(sorted(profiles["data"])) or None,
                members=len(devices),
                elsewhere=_twice(every, here=len(stack.names & set(devices))),
            )
        )
    return found


def _twice(profiles: set[str], *, here: int) -> bool | None:
    if profiles and not profiles <= _KEEPS_TWICE:
        return False
    return True if profiles and here == 1 else None


def _dm(stack: Stack, sys_root: Path) -> list[Array]:
    """Logical volumes that also lie on other drives: a mirror or the very opposite, the kernel does not say."""
    found = []
    for name in sorted(stack.names):
        folder = sys_root / "block" / name
        if not name.startswith("dm-") or not (text_of(folder / "dm" / "uuid") or "").startswith("LVM-"):
            continue
        below = set(names_in(folder / "slaves"))
        if below - stack.names:
            found.append(Array(kind="dm", name=text_of(folder / "dm" / "name") or name, members=len(below)))
    return found
