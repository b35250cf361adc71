"""The kernel's own name of a block device that is told by a path."""

import os
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, text_of


def kernel_name(source: str, sys_root: Path, dev_root: Path) -> str:
    """``dm-0`` for ``/dev/mapper/vault``, ``sda2`` for ``/dev/sda2``.

    Args:
        source: a path below ``/dev``, as the kernel or a file system tells it.
        sys_root: where sysfs is mounted.
        dev_root: where device nodes are; only links there are followed, no node is opened.
    """
    node = source.removeprefix("/dev/")
    if node.startswith("mapper/"):
        for block in names_in(sys_root / "block"):
            if block.startswith("dm-") and text_of(sys_root / "block" / block / "dm" / "name") == node[7:]:
                return block
    return Path(os.path.realpath(dev_root / node)).name
