"""The kernel's traffic counters, and what may be concluded from two looks at them.

Reads, writes and busy time come from psutil; what it drops comes from `diskwatch.machine.stat`.

A counter tells of one device since it appeared. After a boot, or when another disk takes over a name, it starts
anew; subtracting across that would invent traffic. So every total carries its instance.
"""

from collections.abc import Iterable, Mapping
from pathlib import Path

import psutil

from diskwatch.machine.kernel_files import number_of, text_of
from diskwatch.machine.protocol import Counted
from diskwatch.machine.stat import stat_of
from diskwatch.records import IoCounts

_TIME_RANGE = 2**32
"""The kernel prints times as 32-bit milliseconds, and they start again at 0 beyond (field 4, 8 and 10)."""

_LONGEST_REQUEST_MS = 600_000
"""No request takes longer: 30 s a try, six tries and the resets between them (Linux's SCSI disk driver, from
memory) come to a few minutes."""

_MOST_UNDER_WAY = 4_096
"""Requests under way at once on one drive: above any queue that drivers set up (common practice, no source)."""

_SLACK_MS = 1_000  # the two looks are not taken at the very moments that the caller's clock names


def counts(sys_root: Path = Path("/sys"), proc_root: Path = Path("/proc")) -> Mapping[str, Counted]:
    """Totals of the whole disks, by kernel name.

    Partitions, and what is made of other devices (dm, md, loop), are left out: their traffic already counts on
    the disks below. So is a disk for which the kernel was told not to count. Empty where it keeps no counters.
    """
    try:
        # nowrap=False: the default adds up across a fall, and so would splice two drives of one name.
        totals = psutil.disk_io_counters(perdisk=True, nowrap=False)
    except (OSError, NotImplementedError, ValueError):
        return {}
    boot = text_of(proc_root / "sys" / "kernel" / "random" / "boot_id")
    found: dict[str, Counted] = {}
    for name, total in (totals or {}).items():
        if not (sys_root / "block" / name / "device").exists():
            continue
        stat = stat_of(sys_root, name)
        if stat is None:
            continue
        found[name] = Counted(
            counts=IoCounts(
                reads=total.read_count,
                writes=total.write_count,
                read_bytes=total.read_bytes,
                write_bytes=total.write_bytes,
                read_ms=total.read_time,
                write_ms=total.write_time,
                busy_ms=total.busy_time,
                discards=stat.discards,
                discard_bytes=stat.discard_bytes,
                discard_ms=stat.discard_ms,
                flushes=stat.flushes,
                flush_ms=stat.flush_ms,
            ),
            instance=instance_of(sys_root, boot, name),
            in_flight=stat.in_flight,
        )
    return found


def counts_questions(sys_root: Path, name: str) -> bool:
    """Whether the kernel counts a disk's questions, such as ours, among its reads.

    By default it does not (``queue/iostats_passthrough``; Linux, Documentation/ABI, sysfs-block; from memory).
    """
    return number_of(sys_root / "block" / name / "queue" / "iostats_passthrough") == 1


def instance_of(sys_root: Path, boot: str | None, name: str) -> str:
    """What tells this device from any other that had or will have its name.

    The boot, and the number that the kernel gives each new disk (``diskseq``, Linux 5.15 on); before that name
    and size, which miss a swap of equal disks, but then a counter falls.
    """
    folder = sys_root / "block" / name
    number = number_of(folder / "diskseq")
    which = f"disk {number}" if number is not None else f"{name} of {text_of(folder / 'size')} sectors"
    return f"boot {boot}, {which}"


def difference(old: Counted, new: Counted, *, elapsed: float | None = None) -> IoCounts | None:
    """What happened between two looks.

    Args:
        old: the earlier look.
        new: the later look.
        elapsed: seconds between them by a clock that only moves forward, where known.

    Returns:
        The differences, none negative, None for what either look lacks. None altogether where the looks are of
        different instances, or where a counter fell. A time that fell while no count did may have passed its
        32-bit range. That is undone if the result is one that the requests, and the time that went by, could
        have brought; a drive with deep queues passes the range within days.
    """
    if old.instance != new.instance:
        return None
    a, b = old.counts, new.counts
    reads, writes = b.reads - a.reads, b.writes - a.writes
    read_bytes, write_bytes = b.read_bytes - a.read_bytes, b.write_bytes - a.write_bytes
    discards, flushes = _known(a.discards, b.discards), _known(a.flushes, b.flushes)
    discard_bytes = _known(a.discard_bytes, b.discard_bytes)
    if min(reads, writes, read_bytes, write_bytes, discards or 0, flushes or 0, discard_bytes or 0) < 0:
        return None
    wall = None if elapsed is None else round(elapsed * 1_000) + _SLACK_MS
    read_ms = _time(a.read_ms, b.read_ms, _bound(reads, wall))
    write_ms = _time(a.write_ms, b.write_ms, _bound(writes, wall))
    # Without a clock, half the range: a smaller fall than that is no wrap.
    busy_ms = _time(a.busy_ms, b.busy_ms, _TIME_RANGE // 2 if wall is None else wall)
    if read_ms is None or write_ms is None or busy_ms is None:
        return None
    return IoCounts(
        reads=reads,
        writes=writes,
        read_bytes=read_bytes,
        write_bytes=write_bytes,
        read_ms=read_ms,
        write_ms=write_ms,
        busy_ms=busy_ms,
        discards=discards,
        discard_bytes=discard_bytes,
        discard_ms=_known_time(a.discard_ms, b.discard_ms, _bound(discards or 0, wall)),
        flushes=flushes,
        flush_ms=_known_time(a.flush_ms, b.flush_ms, _bound(flushes or 0, wall)),
    )


def traffic(
    blocks: Iterable[str],
    old: Mapping[str, Counted],
    new: Mapping[str, Counted],
    *,
    elapsed: float | None = None,
) -> IoCounts | None:
    """What a drive did between two looks, over all of its block devices.

    Returns:
        None where it has no block device, or where one was not there at both looks or started anew: a part
        would pass for the whole.
    """
    parts = []
    for block in blocks:
        if block not in old or block not in new:
            return None
        part = difference(old[block], new[block], elapsed=elapsed)
        if part is None:
            return None
        parts.append(part)
    return together(parts) if parts else None


def together(parts: Iterable[IoCounts]) -> IoCounts:
    """Sum over the namespaces of a drive; busy time is the busiest one's, a lower bound.

    Namespaces are busy at the same time, so that a sum could exceed the time that went by.
    """
    all_parts = tuple(parts)
    return IoCounts(
        reads=sum(part.reads for part in all_parts),
        writes=sum(part.writes for part in all_parts),
        read_bytes=sum(part.read_bytes for part in all_parts),
        write_bytes=sum(part.write_bytes for part in all_parts),
        read_ms=sum(part.read_ms for part in all_parts),
        write_ms=sum(part.write_ms for part in all_parts),
        busy_ms=max((part.busy_ms for part in all_parts), default=0),
        discards=_sum(part.discards for part in all_parts),
        discard_bytes=_sum(part.discard_bytes for part in all_parts),
        discard_ms=_sum(part.discard_ms for part in all_parts),
        flushes=_sum(part.flushes for part in all_parts),
        flush_ms=_sum(part.flush_ms for part in all_parts),
    )


def completed(counts: IoCounts) -> int:
    """All requests that came to an end, of whatever sort, failed ones too."""
    return counts.reads + counts.writes + (counts.discards or 0) + (counts.flushes or 0)


def _known(old: int | None, new: int | None) -> int | None:
    return None if old is None or new is None else new - old


def _known_time(old: int | None, new: int | None, bound: int) -> int | None:
    return None if old is None or new is None else _time(old, new, bound)


def _sum(parts: Iterable[int | None]) -> int | None:
    """The sum where every part is known: a part would pass for the whole."""
    total = 0
    for part in parts:
        if part is None:
            return None
        total += part
    return total


def _bound(requests: int, wall: int | None) -> int:
    """The most time, summed over requests, that can have come together: at most half the range."""
    most = min(requests * _LONGEST_REQUEST_MS, _TIME_RANGE // 2)
    return most if wall is None else min(most, wall * _MOST_UNDER_WAY)


def _time(old: int, new: int, bound: int) -> int | None:
    if new >= old:
        return new - old
    undone = new + _TIME_RANGE - old
    return undone if new < _TIME_RANGE and 0 <= undone <= bound else None
