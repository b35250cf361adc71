"""The physical drives that the kernel itself lists, each once.

Namespaces of one NVMe controller are one drive. It is addressed as ``/dev/nvme0``, not as its first namespace:
health is the controller's, namespaces come and go while it stays, and smartctl's own list says the same name.
Two paths to one SAS drive are one drive too.
"""

from pathlib import Path

from diskwatch.machine.disks import Disk, look
from diskwatch.machine.kernel_files import names_in
from diskwatch.machine.ports import bay_of
from diskwatch.machine.protocol import Address, Found
from diskwatch.records import Drive, Identity, Kind, Place


def physical_drives(sys_root: Path = Path("/sys")) -> tuple[Found, ...]:
    """List the physical drives, opening none.

    Args:
        sys_root: where sysfs is mounted.

    Returns:
        One a drive, ordered by kernel name; what lives there is left out (`diskwatch.machine.mounts`).
    """
    drives: dict[str, list[Disk]] = {}
    for name in sorted(names_in(sys_root / "block"), key=lambda name: (len(name), name)):
        disk = look(sys_root, name)
        if disk is not None:
            drives.setdefault(_drive_key(disk), []).append(disk)
    return tuple(_found(sys_root, disks) for disks in drives.values())


def node_of(block: str) -> str:
    """The device node of a kernel name; sysfs writes ``!`` where the node has a slash."""
    return "/dev/" + block.replace("!", "/")


def _drive_key(disk: Disk) -> str:
    if disk.controller is not None:
        return disk.controller
    if disk.kind is Kind.SAS and disk.wwn is not None and disk.serial is not None:
        return f"{disk.wwn} {disk.serial}"
    return disk.name


def _found(sys_root: Path, disks: list[Disk]) -> Found:
    first = disks[0]
    node = node_of(first.controller or first.name)
    sizes = [disk.capacity_bytes for disk in disks]
    if first.controller is None:
        capacity = sizes[0]
    else:
        known = [size for size in sizes if size is not None]
        capacity = sum(known) if len(known) == len(sizes) else None
    return Found(
        address=Address(node=node, type=_type(first)),
        blocks=tuple(disk.name for disk in disks),
        place=Place(device=node, bay=bay_of(sys_root, _bay_parts(sys_root, first))),
        drive=Drive(
            identity=Identity(wwn=first.wwn, model=first.model, serial=first.serial, path=node),
            kind=first.kind,
            firmware=first.firmware,
            capacity_bytes=capacity,
            rotation_rpm=first.rotation_rpm,
        ),
        asleep=any(disk.asleep for disk in disks),
        expects_smart=_may_have_smart(first),
        adapter=first.adapter,
        has_statistics=first.statistics,
    )


def _bay_parts(sys_root: Path, disk: Disk) -> tuple[str, ...]:
    """The path whose port counts: a shared NVMe namespace hangs on no bus, but its controller does."""
    if disk.controller is None or disk.controller in disk.parts:
        return disk.parts
    try:
        controller = (sys_root / "class" / "nvme" / disk.controller).resolve(strict=True)
        return controller.relative_to(sys_root.resolve()).parts
    except (OSError, RuntimeError, ValueError):
        return disk.parts


def _type(disk: Disk) -> str | None:
    """The smartctl type where the kernel leaves no doubt; naming it keeps smartctl from trying things out."""
    if disk.bus == "nvme":
        return "nvme"
    if disk.ata:
        return "sat"
    # Behind USB it depends on the bridge, which smartctl knows from its own table.
    return "scsi" if disk.bus == "scsi" and disk.kind is not Kind.USB else None


def _may_have_smart(disk: Disk) -> bool:
    """False for buses without such a command, and for disks that a hypervisor invents over SCSI.

    An invented ATA or NVMe disk often answers, so it is asked.
    """
    if disk.bus in {"virtio", "xen", "mmc"}:
        return False
    return not (disk.kind is Kind.VIRTUAL and disk.bus == "scsi" and not disk.ata)
