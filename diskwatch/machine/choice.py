"""Which drives the owner wants watched: the settings' ``[watch] only`` and ``ignore``."""

import re
from collections.abc import Iterable

from diskwatch.machine.protocol import Found
from diskwatch.records import Identity


def named(identity: Identity, devices: Iterable[str], names: Iterable[str]) -> bool:
    """Whether one of the owner's names means this drive.

    Args:
        identity: who it is, as far as known.
        devices: its device paths or kernel names (``/dev/sda``, ``nvme0n1``).
        names: serials, world-wide names (with or without ``naa.`` or ``0x``), devices; case does not matter.
    """
    own = {_bare(text) for text in (identity.serial, identity.wwn, identity.path, *devices) if text}
    return any(_bare(name) in own for name in names)


def watched(identity: Identity, devices: Iterable[str], *, only: Iterable[str], ignore: Iterable[str]) -> bool:
    """Whether a drive whose identity is known is to be watched; ``ignore`` outweighs ``only``."""
    devices, only = tuple(devices), tuple(only)
    if named(identity, devices, ignore):
        return False
    return not only or named(identity, devices, only)


def asked(found: Found, *, settled: bool, only: Iterable[str], ignore: Iterable[str]) -> bool:
    """Whether a drive is to be asked.

    Args:
        found: the drive as listed.
        settled: whether its identity will not change by asking; behind a USB bridge or a RAID controller a
            drive may yet turn out to be one that ``only`` names.
        only: the drives to watch; none means all.
        ignore: the drives to leave alone.
    """
    devices = devices_of(found)
    if named(found.drive.identity, devices, ignore):
        return False
    return not settled or watched(found.drive.identity, devices, only=only, ignore=())


def devices_of(found: Found) -> tuple[str, ...]:
    """Every name that a drive's device goes by."""
    return (found.place.device, found.address.node, *found.blocks)


def _bare(name: str) -> str:
    folded = " ".join(name.split()).casefold().removeprefix("/dev/")
    return re.sub(r"^(?:(?:naa|eui|uuid)\.|0x)", "", folded)
