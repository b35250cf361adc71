"""Everything that is made of a drive: its partitions, and the arrays, volumes and caches built on them."""

from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, text_of


@dataclass(frozen=True, slots=True, kw_only=True)
class Stack:
    """The block devices that lie on a drive, itself included.

    Attributes:
        names: kernel names (``sda``, ``sda2``, ``dm-0``, ``md0``).
        numbers: device numbers as mountinfo writes them (``8:2``).
    """

    names: frozenset[str]
    numbers: frozenset[str]


def stack_on(sys_root: Path, blocks: Iterable[str]) -> Stack:
    """Walk from a drive's block devices up to all that holds them.

    sysfs names under ``holders/`` who has claimed a device: dm (LVM, LUKS), md and bcache do so. What a device
    holds may itself be partitioned or held again, to any depth.
    """
    names: set[str] = set()
    numbers: set[str] = set()
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
            waiting.extend(names_in(place / "holders"))
    return Stack(names=frozenset(names), numbers=frozenset(numbers))
