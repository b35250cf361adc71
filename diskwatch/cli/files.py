"""The part of ``why`` about the files that failing sectors belong to, where this machine can tell them."""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path

from diskwatch.judge import file_told
from diskwatch.machine.file_blocks import FileBlock, file_block, sector_of
from diskwatch.records import DriveLine, Entry, EventKind, SelfTest

MOST = 3
"""Sectors that are told of; the latest ones."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Failing:
    """A failing sector, and the block of a file system that it is.

    Attributes:
        sector: counted in 512 bytes from the start of the disk.
        place: the block.
    """

    sector: int
    place: FileBlock


def failing(
    line: DriveLine,
    heard: Iterable[Entry],
    tests: Iterable[SelfTest],
    *,
    sys_root: Path = Path("/sys"),
    proc_root: Path = Path("/proc"),
) -> tuple[Failing, ...]:
    """The latest failing sectors that lie in a mounted ext4 file system, newest first.

    Args:
        line: the drive.
        heard: what the day book holds of what the kernel said of it, oldest first.
        tests: its self-tests, newest first.
        sys_root: where sysfs is mounted.
        proc_root: where procfs is mounted.

    Returns:
        None of a drive that is not where it was last seen: another disk may bear its name by now.
    """
    name = line.place.device.removeprefix("/dev/")
    points = {mount.point for mount in line.place.lives_here}
    sectors = [
        *(sector_of(name, test.lba, sys_root=sys_root) for test in tests if test.lba is not None),
        *(
            entry.data["sector"]
            for entry in reversed(tuple(heard))
            if entry.data.get("event") == EventKind.UNREADABLE and entry.data.get("device") == name
        ),
    ]
    found: dict[int, Failing] = {}
    for sector in sectors:
        if not isinstance(sector, int) or sector in found or len(found) == MOST:
            continue
        place = file_block(name, sector, sys_root=sys_root, proc_root=proc_root)
        if place is not None and place.point in points:
            found[sector] = Failing(sector=sector, place=place)
    return tuple(found.values())


def told(sectors: Iterable[Failing]) -> Iterator[str]:
    """How to find their files, a line each."""
    for one in sectors:
        place = one.place
        yield from file_told.which_file(
            sector=one.sector, block=place.block, size=place.size, node=place.node, point=place.point
        )


def answer(sectors: Iterable[Failing]) -> list[dict[str, object]]:
    """The same as JSON."""
    return [
        {
            "sector": one.sector,
            "device": one.place.node,
            "mounted_at": one.place.point,
            "block": one.place.block,
            "block_bytes": one.place.size,
        }
        for one in sectors
    ]
