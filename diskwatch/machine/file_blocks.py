"""Which block of an ext4 file system a sector of a disk is, so that its file can be looked up."""

import os
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.disks import SECTOR
from diskwatch.machine.kernel_files import number_of, text_of
from diskwatch.machine.mounts import mount_lines
from diskwatch.machine.partitions import Piece, piece_at
from diskwatch.machine.patience import Patience


@dataclass(frozen=True, slots=True, kw_only=True)
class FileBlock:
    """A block of a mounted ext4 file system.

    Attributes:
        node: the device node that the file system lies on.
        point: where it is mounted.
        block: the block, counted from the start of the file system.
        size: bytes of one block.
    """

    node: str
    point: str
    block: int
    size: int


def _size_of(point: str) -> int:
    try:
        return os.statvfs(
            point
        ).f_frsize  # ext4 tells its block size here (Linux, fs/ext4/super.c, from memory)
    except OSError:
        return 0


def file_block(
    name: str,
    sector: int,
    *,
    sys_root: Path = Path("/sys"),
    proc_root: Path = Path("/proc"),
    size_of: Callable[[str], int] = _size_of,
) -> FileBlock | None:
    """The block that a sector belongs to.

    Args:
        name: kernel name of the whole disk.
        sector: counted in 512 bytes from its start.
        sys_root: where sysfs is mounted.
        proc_root: where procfs is mounted.
        size_of: asks for the block size of what is mounted somewhere.

    Returns:
        None where no mounted ext4 file system lies there directly; what lies on LVM, encryption or an array
        has its own places, which no reckoning from the disk's gives.
    """
    piece = piece_at(name, sector, sys_root=sys_root) or Piece(name=name, sector=sector)
    disk = sys_root / "block" / name.replace("/", "!")
    device = text_of((disk if piece.name == name else disk / piece.name) / "dev")
    lines = [line for line in mount_lines(proc_root) if line.number == device and line.type == "ext4"]
    if not lines:
        return None
    point = min((line.point for line in lines), key=len)
    size = Patience(size_of)(point)  # a file system on a disk that hangs may never answer
    if size is None or size < SECTOR:
        return None
    return FileBlock(
        node=f"/dev/{piece.name.replace('!', '/')}",
        point=point,
        block=piece.sector * SECTOR // size,
        size=size,
    )


def sector_of(name: str, logical_block: int, *, sys_root: Path = Path("/sys")) -> int:
    """The 512-byte sector at which a disk's own block begins, as a self-test counts them."""
    size = number_of(sys_root / "block" / name.replace("/", "!") / "queue" / "logical_block_size")
    return logical_block * ((size or SECTOR) // SECTOR)
