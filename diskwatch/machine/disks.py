"""What sysfs alone says of one disk, without opening it."""

import re
from dataclasses import dataclass
from pathlib import Path

from diskwatch.machine.identify import Identified, remembered
from diskwatch.machine.kernel_files import bytes_of, names_in, number_of, text_of, tidy
from diskwatch.records import Kind

SECTOR = 512
"""Bytes a sector in ``size``, whatever the device's own sectors (Linux, Documentation/ABI, block)."""

_NOT_DRIVES = re.compile(r"(?:loop|zram|ram|dm-|md|nbd|zd|bcache|drbd|rbd|mtdblock|ubiblock|fd|sr)\d.*")
_CARD_CORNERS = re.compile(r"mmcblk\d+(?:boot\d+|rpmb|gp\d+)")
_SCSI_DISKS = frozenset({0, 7, 14})  # SPC: direct access, optical memory, simplified direct access
_WWN = re.compile(r"(?:naa|eui|uuid|nvme)\..+")
_INVENTED = re.compile(r"qemu|vbox|orcl-vbox|vmware|msft|xensrc|virtual (?:disk|hd)|scsi_debug", re.IGNORECASE)


@dataclass(frozen=True, slots=True, kw_only=True)
class Disk:
    """One disk, or one namespace of an NVMe drive, as sysfs shows it.

    Attributes:
        name: kernel name, ``sda``.
        parts: its resolved path below the root of sysfs.
        bus: ``scsi``, ``nvme``, ``virtio``, ``xen``, ``mmc`` or ``other``.
        kind: what sort of device.
        ata: whether it is an ATA drive that the kernel or an adapter translates to SCSI.
        controller: the NVMe controller, ``nvme0``; None for all else.
        model: model, or None.
        serial: serial, or None.
        wwn: world-wide name as ``wwid`` writes it, or None.
        firmware: firmware revision, or None.
        capacity_bytes: capacity in bytes, or None.
        rotation_rpm: turns a minute, or None.
        asleep: whether the kernel itself has suspended it.
        adapter: the USB device that it is or hangs on: ids, revision, serial; None on other buses.
        statistics: whether it has Device Statistics, see `diskwatch.machine.identify.Identified`.
    """

    name: str
    parts: tuple[str, ...]
    bus: str
    kind: Kind
    ata: bool
    controller: str | None
    model: str | None
    serial: str | None
    wwn: str | None
    firmware: str | None
    capacity_bytes: int | None
    rotation_rpm: int | None
    asleep: bool
    adapter: str | None
    statistics: bool | None


def look(sys_root: Path, name: str) -> Disk | None:
    """Look at one entry of ``/sys/block``.

    Returns:
        None where it is no physical disk: made of other devices or of memory, reached over a network, a
        cdrom or floppy, a reader without a card, or one path of a drive that shows under another name.
    """
    folder = sys_root / "block" / name
    parts = _resolved(sys_root, folder)
    if parts is None or not _physical(folder, name, parts):
        return None
    bus = _bus(name, parts)
    usb = any(re.fullmatch(r"usb\d+", part) for part in parts)
    vendor = text_of(folder / "device" / "vendor") if bus == "scsi" else None
    ata = bus == "scsi" and vendor == "ATA" and not usb
    told = _identified(sys_root, parts) if ata else None
    model = _model(folder, bus, ata, vendor, told)
    sectors = number_of(folder / "size")
    return Disk(
        name=name,
        parts=parts,
        bus=bus,
        kind=_kind(bus, usb, ata, model, _turns(folder, told)),
        ata=ata,
        controller=_controller(folder) if bus == "nvme" else None,
        model=model,
        serial=_serial(sys_root, folder, bus, parts, told),
        wwn=_wwn(folder, bus, told),
        firmware=_firmware(folder, bus, ata, told),
        capacity_bytes=sectors * SECTOR if sectors else None,
        rotation_rpm=told.rotation_rpm if told is not None else None,
        asleep=asleep(sys_root, name),
        adapter=_adapter(sys_root, parts) if usb else None,
        statistics=told.statistics if told is not None else None,
    )


def asleep(sys_root: Path, name: str) -> bool:
    """Whether the kernel has suspended a disk, so that any command, even a question, would wake it."""
    return text_of(sys_root / "block" / name / "device" / "power" / "runtime_status") == "suspended"


def _resolved(sys_root: Path, folder: Path) -> tuple[str, ...] | None:
    try:
        return folder.resolve(strict=True).relative_to(sys_root.resolve()).parts
    except (OSError, RuntimeError, ValueError):  # gone meanwhile, a loop of links, or outside of this tree
        return None


def _physical(folder: Path, name: str, parts: tuple[str, ...]) -> bool:
    # "virtual" is the kernel's word for devices that hang on no bus; the one physical thing there is an NVMe
    # drive that could have several controllers, whose namespaces then belong to none of them.
    if _NOT_DRIVES.fullmatch(name) or _CARD_CORNERS.fullmatch(name):
        return False
    if parts[:2] == ("devices", "virtual") and "nvme-subsystem" not in parts:
        return False
    if text_of(folder / "hidden") == "1" or not (folder / "device").exists():
        return False
    if text_of(folder / "removable") == "1" and number_of(folder / "size") == 0:
        return False
    device_type = number_of(folder / "device" / "type") if _bus(name, parts) == "scsi" else None
    return device_type is None or device_type in _SCSI_DISKS


def _bus(name: str, parts: tuple[str, ...]) -> str:
    if name.startswith("nvme"):
        return "nvme"
    if name.startswith("mmcblk"):
        return "mmc"
    above = parts[-3] if len(parts) >= 3 and parts[-2] == "block" else ""
    if re.fullmatch(r"\d+:\d+:\d+:\d+", above):
        return "scsi"
    if re.fullmatch(r"virtio\d+", above):
        return "virtio"
    return "xen" if re.fullmatch(r"vbd-\d+", above) else "other"


def _controller(folder: Path) -> str | None:
    """``nvme0``: the controller, or the first of those that share the drive."""
    device = folder / "device"
    try:
        owner = device.resolve(strict=True).name
    except (OSError, RuntimeError):
        return None
    if re.fullmatch(r"nvme\d+", owner):
        return owner
    shared = [name for name in names_in(device) if re.fullmatch(r"nvme\d+", name)]
    return min(shared, key=lambda name: (len(name), name), default=None)


def _identified(sys_root: Path, parts: tuple[str, ...]) -> Identified | None:
    for index, part in enumerate(parts):
        if re.fullmatch(r"ata\d+", part):
            return remembered(sys_root.joinpath(*parts[: index + 1]))
    return None


def _model(folder: Path, bus: str, ata: bool, vendor: str | None, told: Identified | None) -> str | None:
    if told is not None and told.model is not None:
        return told.model
    if bus == "mmc":
        return text_of(folder / "device" / "name")
    model = text_of(folder / "device" / "model")
    if bus == "scsi" and not ata and vendor is not None:
        return f"{vendor} {model}" if model is not None else vendor
    return model


def _serial(
    sys_root: Path, folder: Path, bus: str, parts: tuple[str, ...], told: Identified | None
) -> str | None:
    if told is not None and told.serial is not None:
        return told.serial
    if bus == "virtio":
        return text_of(folder / "serial")
    if bus == "scsi":
        return _unit_serial(bytes_of(folder / "device" / "vpd_pg80")) or _usb_serial(sys_root, parts)
    return text_of(folder / "device" / "serial")


def _unit_serial(page: bytes | None) -> str | None:
    """The serial in the unit serial number page (SPC: page code in byte 1, length in bytes 2 and 3)."""
    if page is None or len(page) < 5 or page[1] != 0x80:
        return None
    return tidy(page[4 : 4 + int.from_bytes(page[2:4], "big")])


def _usb_device(sys_root: Path, parts: tuple[str, ...]) -> Path | None:
    """The folder of the USB device, the nearest above the disk."""
    for index in range(len(parts) - 1, 0, -1):
        if re.fullmatch(r"\d+-\d+(?:\.\d+)*", parts[index]):
            return sys_root.joinpath(*parts[: index + 1])
    return None


def _usb_serial(sys_root: Path, parts: tuple[str, ...]) -> str | None:
    device = _usb_device(sys_root, parts)
    return text_of(device / "serial") if device is not None else None


def _adapter(sys_root: Path, parts: tuple[str, ...]) -> str | None:
    """Which adapter it is (names of the files: Linux, Documentation/ABI, sysfs-bus-usb); None without ids."""
    device = _usb_device(sys_root, parts)
    if device is None:
        return None
    ids = [text_of(device / name) for name in ("idVendor", "idProduct", "bcdDevice")]
    if ids[0] is None or ids[1] is None:
        return None
    told = ":".join(one for one in ids if one is not None)
    return f"{told} {text_of(device / 'serial') or ''}".rstrip()


def _wwn(folder: Path, bus: str, told: Identified | None) -> str | None:
    """A world-wide name; the ``t10.`` form is only maker, model and serial again and counts as none."""
    name = text_of(folder / "wwid" if bus == "nvme" else folder / "device" / "wwid")
    if name is not None and _WWN.fullmatch(name):
        return name
    return told.wwn if told is not None else None


def _firmware(folder: Path, bus: str, ata: bool, told: Identified | None) -> str | None:
    if told is not None:
        return told.firmware
    if ata:
        return None  # the SCSI face shows half of it, which would read as another revision
    return text_of(folder / "device" / {"nvme": "firmware_rev", "mmc": "fwrev"}.get(bus, "rev"))


def _kind(bus: str, usb: bool, ata: bool, model: str | None, turns: bool) -> Kind:
    if bus in {"virtio", "xen"} or (model is not None and _INVENTED.match(model)):
        return Kind.VIRTUAL
    if bus == "nvme":
        return Kind.NVME
    if usb:
        return Kind.USB
    if bus == "scsi" and not ata:
        return Kind.SAS
    return Kind.HDD if turns else Kind.SSD


def _turns(folder: Path, told: Identified | None) -> bool:
    """Whether it turns; not known counts as turning, the kernel's own default."""
    if told is not None and told.rotating is not None:
        return told.rotating
    return number_of(folder / "queue" / "rotational") != 0
