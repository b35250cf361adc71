"""A drive: who it is, and where it is plugged in now."""

from dataclasses import dataclass
from enum import StrEnum

from diskwatch.records.placeholders import empty_serial, empty_wwn


class Kind(StrEnum):
    """What sort of device it is: the first that fits, in this order."""

    VIRTUAL = "virtual"
    NVME = "nvme"
    USB = "usb"
    SAS = "sas"
    SSD = "ssd"
    HDD = "hdd"


@dataclass(frozen=True, slots=True, kw_only=True)
class Identity:
    """What tells one physical drive from every other, as far as it is known.

    Attributes:
        wwn: world-wide name as Linux's ``wwid`` writes it (``naa.5000c500a0000001``, ``eui.…``), or None.
        model: model as the drive gives it, outer blanks removed, or None.
        serial: serial as the drive gives it, outer blanks removed, or None; may be one that stands for nothing
            (``XXXXXXXX``), see ``telling_serial``.
        path: where it answered (``/dev/sda``, ``/dev/bus/0 megaraid,7``); identifies it only when nothing
            else does, and weakly, since paths change.
    """

    wwn: str | None
    model: str | None
    serial: str | None
    path: str

    @property
    def weak(self) -> bool:
        """Whether only the path tells this drive from others."""
        return empty_wwn(self.wwn) and self.telling_serial is None

    @property
    def telling_serial(self) -> str | None:
        """The serial where it can tell one drive from another, else None."""
        return None if empty_serial(self.serial) else self.serial


@dataclass(frozen=True, slots=True, kw_only=True)
class Drive:
    """One physical device.

    Attributes:
        identity: who it is.
        kind: what sort of device.
        firmware: firmware revision, or None.
        capacity_bytes: user capacity in bytes, or None.
        rotation_rpm: turns a minute; None for solid-state drives and where it is not known.
    """

    identity: Identity
    kind: Kind
    firmware: str | None = None
    capacity_bytes: int | None = None
    rotation_rpm: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Mount:
    """A file system of which at least a part lies on the drive.

    Attributes:
        point: where it is mounted.
        used_bytes: bytes in use on the whole file system, or None where that could not be asked.
        total_bytes: its size in bytes, or None likewise.
    """

    point: str
    used_bytes: int | None = None
    total_bytes: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a drive is now; a drive moves between places and its history moves with it.

    Attributes:
        device: how to address it (``/dev/sda``; behind a controller path and type: ``/dev/bus/0 megaraid,7``).
        bay: where it is plugged in (bus path of the port), or None where the kernel does not say.
        lives_here: what is mounted from it.
    """

    device: str
    bay: str | None = None
    lives_here: tuple[Mount, ...] = ()
