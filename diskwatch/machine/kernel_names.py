"""Which drive the kernel means by a name in its log: ``ata3.00``, ``2:0:0:0``, ``nvme0``, ``sda1``."""

import re
from collections.abc import Iterable, Mapping
from pathlib import Path

from diskwatch.machine.disks import look
from diskwatch.machine.stacks import stack_on

_PORT = re.compile(r"ata\d+")
_ADDRESS = re.compile(r"\d+:(\d+):(\d+):\d+")


def kernel_names(
    drives: Mapping[str, Iterable[str]], *, sys_root: Path = Path("/sys"), dev_root: Path = Path("/dev")
) -> dict[str, tuple[str, ...]]:
    """The drives by every name that the kernel may call them in its log.

    Args:
        drives: kernel names of each drive's block devices, by a key of the caller's.
        sys_root: where sysfs is mounted.
        dev_root: where device nodes are; none is opened.

    Returns:
        Keys of drives by name; several where a volume lies on several. A port on which several drives hang is
        left out: its lines speak of none of them in particular.
    """
    found: dict[str, dict[str, None]] = {}
    ports: dict[str, dict[str, None]] = {}
    for key, blocks in drives.items():
        for block in blocks:
            port, names = _names(sys_root, block)
            for name in names:
                found.setdefault(name, {})[key] = None
            if port is not None:
                ports.setdefault(port, {})[key] = None
        for name in sorted(stack_on(sys_root, blocks, dev_root=dev_root).names):
            found.setdefault(name, {})[key] = None
    found.update({port: keys for port, keys in ports.items() if len(keys) == 1})
    return {name: tuple(keys) for name, keys in found.items()}


def _names(sys_root: Path, block: str) -> tuple[str | None, tuple[str, ...]]:
    """The ATA port of a disk, if any, and the names of its bus addresses."""
    disk = look(sys_root, block)
    if disk is None:
        return None, ()
    names = [] if disk.controller is None else [disk.controller]
    port = next((part for part in disk.parts if _PORT.fullmatch(part)), None)
    for part in disk.parts:
        address = _ADDRESS.fullmatch(part)
        if address is None:
            continue
        names.append(part)
        if port is not None:
            # A port multiplier shows as a channel, the second drive on an old cable as a target.
            names.append(f"{port}.{int(address[1]) or int(address[2]):02d}")
    return port, tuple(names)
