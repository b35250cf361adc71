"""Where a drive is plugged in, read from the bus path that sysfs resolves to.

The form is our own: readable, and the same after every boot with the same cabling. Host and disk numbers, which
the kernel gives out by order of discovery, do not enter where anything better is there.
"""

import re
from collections.abc import Sequence
from pathlib import Path

from diskwatch.machine.kernel_files import number_of

_PCI = re.compile(r"[0-9a-f]{4,}:[0-9a-f]{2}:[0-9a-f]{2}\.[0-7]")
_ATA = re.compile(r"ata(\d+)")
_USB_PORT = re.compile(r"\d+-\d+(?:\.\d+)*")
_END_DEVICE = re.compile(r"end_device-\d+:(\d+(?::\d+)*)")
_SCSI = re.compile(r"\d+:(\d+):(\d+):(\d+)")
_HOST = re.compile(r"host\d+")
_BARE = re.compile(r"virtio\d+|vbd-\d+|mmc\d+")


def bay_of(sys_root: Path, parts: Sequence[str]) -> str | None:
    """The bay of a disk.

    Args:
        sys_root: where sysfs is mounted.
        parts: the disk's resolved path below it (``devices``, ``pci0000:00``, …, ``block``, ``sda``).

    Returns:
        ``usb 1-4``, ``pci-0000:00:17.0-ata-3``, ``pci-0000:01:00.0 nvme``, ``pci-0000:02:00.0-sas-bay-5``,
        ``virtio1`` and the like; None where the path shows no port.
    """
    host = next((index for index, part in enumerate(parts) if _HOST.fullmatch(part)), None)
    for index in range(len(parts) - 1, -1, -1):
        part = parts[index]
        if _BARE.fullmatch(part):
            return part if host is None else f"{part}-scsi-{_lun(parts)}"
        if _USB_PORT.fullmatch(part) and any(re.fullmatch(r"usb\d+", above) for above in parts[:index]):
            return f"usb {part}"
        if part == "nvme":
            return f"{_controller(parts[:index])} nvme"
        if _END_DEVICE.fullmatch(part):
            return _sas(sys_root, parts, index)
        if _ATA.fullmatch(part):
            return _ata(sys_root, parts, index)
    # Every SCSI disk has a host, so it says the least and comes last.
    return f"{_controller(parts[:host])}-scsi-{_lun(parts)}" if host is not None else None


def _ata(sys_root: Path, parts: Sequence[str], index: int) -> str:
    """The controller and its own port number; the N of ataN counts over all controllers and may shift."""
    port = sys_root.joinpath(*parts[: index + 1])
    number = number_of(port / "ata_port" / parts[index] / "port_no")
    name = f"{_controller(parts[:index])}-ata-{parts[index].removeprefix('ata') if number is None else number}"
    channel, target, _ = _address(parts)
    # A port multiplier shows as a channel, the second drive on an old cable as a target.
    return f"{name}.{channel or target}" if channel or target else name


def _sas(sys_root: Path, parts: Sequence[str], index: int) -> str:
    """The enclosure's bay where it says so, else the chain of ports from the controller down."""
    end = parts[index]
    bay = number_of(sys_root.joinpath(*parts[: index + 1]) / "sas_device" / end / "bay_identifier")
    host = next((at for at, part in enumerate(parts) if _HOST.fullmatch(part)), index)
    chain = end.partition("-")[2].partition(":")[2]  # without the host's number
    return f"{_controller(parts[:host])}-sas-{chain if bay is None else f'bay-{bay}'}"


def _controller(above: Sequence[str]) -> str:
    """The nearest PCI function above, else the device right above."""
    for part in reversed(above):
        if _PCI.fullmatch(part):
            return f"pci-{part}"
    return above[-1] if above else "unknown"


def _lun(parts: Sequence[str]) -> str:
    return ":".join(str(number) for number in _address(parts))


def _address(parts: Sequence[str]) -> tuple[int, int, int]:
    """Channel, target and logical unit of the SCSI device on the path; zeros where there is none."""
    for part in reversed(parts):
        if found := _SCSI.fullmatch(part):
            return int(found[1]), int(found[2]), int(found[3])
    return 0, 0, 0
