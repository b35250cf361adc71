"""Joins the drives that the kernel lists with those that smartctl's scan lists, each once. Pure."""

import re
from collections import Counter
from collections.abc import Collection, Iterable, Sequence
from dataclasses import replace

from diskwatch.machine.blocks import node_of
from diskwatch.machine.protocol import Address, Found
from diskwatch.records import Drive, Identity, Kind, Place

_BEHIND = re.compile(r"(?:sat\+)?(?:megaraid|sssraid|3ware|areca|aacraid|cciss|hpt|jmb39x|jms56x),.*")
"""smartctl's types that pick one of several drives behind a node."""


def joined(
    drives: Sequence[Found], entries: Iterable[Address], listed: Collection[str] = ()
) -> tuple[Found, ...]:
    """The union of the kernel's and the scan's drives.

    Args:
        drives: what the kernel lists.
        entries: what the scan lists.
        listed: kernel names of all block devices, also those that are no drives (an empty card reader): a scan
            that names one adds nothing.

    Returns:
        The kernel's drives in their order, then the drives that only the scan knows, in its order.
    """
    owners = {
        node: number
        for number, drive in enumerate(drives)
        for node in (drive.address.node, *(node_of(block) for block in drive.blocks))
    }
    known = {node_of(block) for block in listed}
    types: dict[int, str] = {}
    extra: list[Address] = []
    for entry in dict.fromkeys(entries):
        if entry.type is not None and _BEHIND.fullmatch(entry.type):
            extra.append(entry)
        elif entry.node in owners:
            # A bare "scsi" is only what the scan says of every sd node that it did not open.
            if entry.type not in {None, "scsi"}:
                types.setdefault(owners[entry.node], str(entry.type))
        elif entry.node not in known:
            extra.append(entry)
    shared = Counter(entry.node for entry in extra)
    return (
        *(_typed(drive, types.get(number)) for number, drive in enumerate(drives)),
        *(_scanned(entry, alone=shared[entry.node] == 1) for entry in extra),
    )


def _typed(drive: Found, type_: str | None) -> Found:
    if drive.address.type is not None or type_ is None:
        return drive
    return replace(drive, address=replace(drive.address, type=type_))


def _scanned(entry: Address, *, alone: bool) -> Found:
    type_ = entry.type
    behind = type_ is not None and _BEHIND.fullmatch(type_) is not None
    device = f"{entry.node} {type_}" if type_ is not None and (behind or not alone) else entry.node
    return Found(
        address=entry,
        blocks=(),
        place=Place(device=device),
        drive=Drive(
            identity=Identity(wwn=None, model=None, serial=None, path=device), kind=_likely_kind(type_ or "")
        ),
    )


def _likely_kind(type_: str) -> Kind:
    """What the type hints at, until the drive has told what it is."""
    if type_.startswith(("nvme", "snt")):
        return Kind.USB if type_.startswith("snt") else Kind.NVME
    if type_.startswith("usb"):
        return Kind.USB
    return Kind.SAS if type_ == "scsi" or type_.startswith(("megaraid", "sssraid", "cciss")) else Kind.HDD
