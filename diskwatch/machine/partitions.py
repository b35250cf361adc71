"""Which partition of a disk a sector lies in, as the kernel has laid them out; no device is opened."""

from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, number_of


@dataclass(frozen=True, slots=True, kw_only=True)
class Piece:
    """A place within a partition.

    Attributes:
        name: the partition's kernel name, ``sda2``.
        sector: the place, sectors of 512 bytes from the partition's start.
    """

    name: str
    sector: int


def piece_at(block: str, sector: int, *, sys_root: Path = Path("/sys")) -> Piece | None:
    """The partition that a sector of a disk lies in; None where it lies in none, or that is not known.

    Args:
        block: kernel name of the whole disk.
        sector: counted in 512 bytes from its start, as the kernel counts ``start`` and ``size`` too (Linux,
            Documentation/ABI/stable/sysfs-block).
        sys_root: where sysfs is mounted.
    """
    folder = sys_root / "block" / block.replace("/", "!")
    for name in names_in(folder):
        if not (folder / name / "partition").exists():
            continue
        start, size = number_of(folder / name / "start"), number_of(folder / name / "size")
        if start is not None and size is not None and start <= sector < start + size:
            return Piece(name=name, sector=sector - start)
    return None
