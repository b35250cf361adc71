"""What file systems and arrays themselves keep count of, as far as the kernel shows it; no device is opened.

Sources: Linux, Documentation/ABI/testing/sysfs-fs-ext4 (``errors_count``) and sysfs-fs-btrfs
(``devinfo/ID/error_stats``, since 5.14 from memory), Documentation/admin-guide/md.rst (``degraded``,
``mismatch_cnt``, ``dev-XXX/errors``). ext4 keeps its count in the superblock until the file
system is checked, btrfs until its owner resets it, md in the member's own metadata.
"""

from collections.abc import Iterable, Mapping
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, number_of, text_of
from diskwatch.machine.stacks import Stack
from diskwatch.machine.zfs import pool_on
from diskwatch.records import ARRAYS, FILE_SYSTEMS, SignalKind, Value

_BTRFS_COUNTS = frozenset({"write_errs", "read_errs", "flush_errs", "corruption_errs", "generation_errs"})
_WHOLE = frozenset({"ONLINE"})


def kept_errors(
    stack: Stack,
    *,
    sys_root: Path = Path("/sys"),
    pools: Mapping[str, str] | None = None,
) -> tuple[Value, ...]:
    """What the file systems and arrays on a drive count.

    A signal is left out where nothing on the drive counts it: a file system that is not mounted shows nothing,
    and that is not the same as no error.

    Args:
        stack: the drive and all that is made of it.
        sys_root: where sysfs is mounted.
        pools: states of the imported ZFS pools (`diskwatch.machine.zfs.states`).
    """
    found = {
        "ext4-errors": (_ext4(stack, sys_root), FILE_SYSTEMS, SignalKind.COUNT),
        "btrfs-errors": (_btrfs(stack, sys_root), FILE_SYSTEMS, SignalKind.COUNT),
        "array-read-errors": (_md_members(stack, sys_root), ARRAYS, SignalKind.COUNT),
        "array-mismatches": (_md_sum(stack, sys_root, "mismatch_cnt"), ARRAYS, SignalKind.GAUGE),
        "degraded-arrays": (_degraded(stack, sys_root, pools or {}), ARRAYS, SignalKind.GAUGE),
    }
    return tuple(
        Value(signal=signal, value=value, unit="events", kind=kind, source=source)
        for signal, (value, source, kind) in found.items()
        if value is not None
    )


def _ext4(stack: Stack, sys_root: Path) -> int | None:
    folder = sys_root / "fs" / "ext4"
    return _total(
        number_of(folder / name / "errors_count") for name in sorted(stack.names & set(names_in(folder)))
    )


def _btrfs(stack: Stack, sys_root: Path) -> int | None:
    """Of file systems that lie on one device: which of several an id means, the kernel does not show."""
    counts = []
    for uuid in names_in(sys_root / "fs" / "btrfs"):
        folder = sys_root / "fs" / "btrfs" / uuid
        devices, ids = names_in(folder / "devices"), names_in(folder / "devinfo")
        if len(devices) == len(ids) == 1 and devices[0] in stack.names:
            counts.append(_btrfs_errors(text_of(folder / "devinfo" / ids[0] / "error_stats") or ""))
    return _total(counts)


def _btrfs_errors(text: str) -> int | None:
    lines = [line.split() for line in text.splitlines()]
    counts = [
        int(line[1]) for line in lines if len(line) == 2 and line[0] in _BTRFS_COUNTS and line[1].isdigit()
    ]
    return sum(counts) if counts else None


def _arrays(stack: Stack, sys_root: Path) -> list[Path]:
    folders = (sys_root / "block" / name / "md" for name in sorted(stack.names))
    return [folder for folder in folders if folder.is_dir()]


def _md_members(stack: Stack, sys_root: Path) -> int | None:
    """Reads that md had to mend from the other members, of the members on this drive."""
    return _total(
        number_of(folder / member / "errors")
        for folder in _arrays(stack, sys_root)
        for member in names_in(folder)
        if member.removeprefix("dev-") in stack.names and member.startswith("dev-")
    )


def _md_sum(stack: Stack, sys_root: Path, what: str) -> int | None:
    return _total(number_of(folder / what) for folder in _arrays(stack, sys_root))


def _degraded(stack: Stack, sys_root: Path, pools: Mapping[str, str]) -> int | None:
    """How many arrays and pools lack a member, of those that the drive belongs to."""
    lacking = [number_of(folder / "degraded") for folder in _arrays(stack, sys_root)]
    lacking += [
        _missing(sys_root / "fs" / "btrfs" / uuid, stack) for uuid in names_in(sys_root / "fs" / "btrfs")
    ]
    pool = pool_on(stack, dict.fromkeys(pools, True))
    if pool is not None:
        lacking.append(0 if pools[pool] in _WHOLE else 1)
    return _total(None if count is None else min(count, 1) for count in lacking)


def _missing(folder: Path, stack: Stack) -> int | None:
    ids = names_in(folder / "devinfo")
    if len(ids) < 2 or stack.names.isdisjoint(names_in(folder / "devices")):
        return None
    return _total(number_of(folder / "devinfo" / one / "missing") for one in ids)


def _total(counts: Iterable[int | None]) -> int | None:
    """The sum of what is known; None where nothing is."""
    known = [count for count in counts if count is not None]
    return sum(known) if known else None
