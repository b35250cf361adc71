"""Everything that is made of a drive: its partitions, and the arrays, volumes and caches built on them."""

from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, text_of
from diskwatch.machine.nodes import kernel_name


@dataclass(frozen=True, slots=True, kw_only=True)
class Stack:
    """The block devices that lie on a drive, itself included.

    Attributes:
        names: kernel names (``sda``, ``sda2``, ``dm-0``, ``md0``).
        numbers: device numbers as mountinfo writes them (``8:2``).
        labels: names that its partitions were given.
    """

    names: frozenset[str]
    numbers: frozenset[str]
    labels: frozenset[str] = frozenset()


def stack_on(sys_root: Path, blocks: Iterable[str], *, dev_root: Path = Path("/dev")) -> Stack:
    """Walk from a drive's block devices up to all that holds them.

    sysfs names under ``holders/`` who has claimed a device: dm (LVM, LUKS), md and bcache do so. A loop device
    claims nothing, but tells what it stands on. What a device holds may itself be partitioned or held again, to
    any depth.

    Args:
        sys_root: where sysfs is mounted.
        blocks: kernel names of the drive's block devices.
        dev_root: where device nodes are; none is opened.
    """
    names: set[str] = set()
    numbers: set[str] = set()
    labels: set[str] = set()
    loops = _loops(sys_root, dev_root)
    waiting = list(blocks)
    while waiting:
        block = waiting.pop()
        if block in names:
            continue
        folder = sys_root / "block" / block
        pieces = [name for name in names_in(folder) if (folder / name / "partition").exists()]
        for name, place in ((block, folder), *((piece, folder / piece) for piece in pieces)):
            names.add(name)
            number = text_of(place / "dev")
            if number is not None:
                numbers.add(number)
            label = _label(place)
            if label is not None:
                labels.add(label)
            waiting.extend(names_in(place / "holders"))
            waiting.extend(loops.get(name, ()))
    return Stack(names=frozenset(names), numbers=frozenset(numbers), labels=frozenset(labels))


def _loops(sys_root: Path, dev_root: Path) -> dict[str, list[str]]:
    """Loop devices by the block device that each stands on.

    One that stands on a file is left out: what it holds is counted in the file system with that file.
    """
    found: dict[str, list[str]] = {}
    for name in names_in(sys_root / "block"):
        below = (
            text_of(sys_root / "block" / name / "loop" / "backing_file") if name.startswith("loop") else None
        )
        if below is not None and below.startswith("/dev/"):
            found.setdefault(kernel_name(below, sys_root, dev_root), []).append(name)
    return found


def _label(place: Path) -> str | None:
    for line in (text_of(place / "uevent") or "").splitlines():
        if line.startswith("PARTNAME="):
            return line.removeprefix("PARTNAME=")
    return None
