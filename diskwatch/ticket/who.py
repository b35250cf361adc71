"""Which drive a ticket is about, what its owner said of it, and which machine it is in."""

from dataclasses import dataclass

from diskwatch.history.proof import Plugged
from diskwatch.records import DriveLine
from diskwatch.ticket.part import Json, Part, at, short

_MOST_PLACES = 200


@dataclass(frozen=True, slots=True, kw_only=True)
class Host:
    """The machine that a ticket is made on.

    Attributes:
        name: its host name.
        system: its kernel's name, ``Linux``.
        kernel: the kernel's release.
        architecture: ``x86_64`` and the like.
        users: names of its users, for hiding; they stand in no ticket by themselves.
    """

    name: str
    system: str
    kernel: str
    architecture: str
    users: tuple[str, ...] = ()


def host_part(host: Host) -> Part:
    """The machine."""
    return Part(
        value={
            "host": short(host.name),
            "system": short(host.system),
            "kernel": short(host.kernel),
            "architecture": short(host.architecture),
        }
    )


def drive_part(line: DriveLine) -> Part:
    """The drive: who it is and where it is."""
    drive = line.drive
    hours = next((one.value for one in line.signals if one.name == "power-on-hours"), None)
    return Part(
        value={
            "model": short(drive.identity.model),
            "serial": short(drive.identity.serial),
            "wwn": short(drive.identity.wwn),
            "identity_is_weak": drive.identity.weak,
            "firmware": short(drive.firmware),
            "kind": drive.kind.value,
            "capacity_bytes": drive.capacity_bytes,
            "rotation_rpm": drive.rotation_rpm,
            "power_on_hours": hours if isinstance(hours, int) else None,
            "device": short(line.place.device),
            "bay": short(line.place.bay),
            "lives_here": [
                {
                    "mounted_at": short(mount.point),
                    "used_bytes": mount.used_bytes,
                    "total_bytes": mount.total_bytes,
                }
                for mount in line.place.lives_here[:_MOST_PLACES]
            ],
            "first_seen": at(line.first_seen),
        }
    )


def owner_part(line: DriveLine) -> Part:
    """What the owner said of the drive."""
    said = {
        "label": short(line.label),
        "asset": short(line.owner.asset),
        "warranty_until": short(line.owner.warranty_until),
        "backed_up": short(line.owner.backed_up),
        "replaced_by": short(line.owner.replaced_by),
    }
    if any(value is not None for value in said.values()):
        return Part(value=said)
    return Part(value=None, reason="The owner has said nothing of this drive.")


def moves_part(places: tuple[Plugged, ...]) -> Part:
    """Where the drive has been plugged in, oldest first; of very many the newest."""
    found: list[Json] = [
        {"since": at(one.since), "device": short(one.device), "bay": short(one.bay)} for one in places
    ]
    return Part(value=found[-_MOST_PLACES:])
