"""What a band says of a drive in words: its name, its kind, where it is, what lives there, the leading reason.

Everything that came from a drive or a path is made harmless here, once.
"""

from rich.cells import cell_len

from diskwatch.records import CallWord, DriveLine, Kind, Mount, Outcome
from diskwatch.units import plain, say_bytes

_DEVICES = "/dev/"
_KINDS = {
    Kind.VIRTUAL: "virtual",
    Kind.NVME: "NVMe",
    Kind.USB: "USB",
    Kind.SAS: "SAS",
    Kind.SSD: "SSD",
    Kind.HDD: "hard disk",
}


def name(line: DriveLine, *, roomy: bool = False) -> str:
    """The owner's name for the drive, else its model, else its device; roomy: the model beside the label."""
    model = line.drive.identity.model
    if roomy and line.label and model:
        return plain(f"{line.label} ({model})")
    return plain(line.name).removeprefix(_DEVICES)


def kind(line: DriveLine) -> str:
    """What sort of device it is."""
    return _KINDS[line.drive.kind]


def device(line: DriveLine) -> str:
    """How it is addressed, without the folder that all device nodes are in."""
    return plain(line.place.device).removeprefix(_DEVICES)


def holdings(line: DriveLine, width: int, *, roomy: bool = False) -> str:
    """What is mounted from it, as much as fits; how many more there are where it does not.

    Places that only serve starting the machine come last: people look for their own things. Where there is
    room the amount in use stands beside each.
    """
    mounts = sorted(line.place.lives_here, key=lambda mount: mount.point.startswith("/boot"))
    full = ", ".join(_mount(mount) for mount in mounts)
    if roomy and cell_len(full) <= width:
        return full
    points = [plain(mount.point) for mount in mounts]
    for shown in range(len(points), -1, -1):
        more = len(points) - shown
        parts = points[:shown] + ([f"{more} more" if shown else f"{more} mounted"] if more else [])
        text = ", ".join(parts)
        if cell_len(text) <= width:
            return text
    return ""


def _mount(mount: Mount) -> str:
    point = plain(mount.point)
    if mount.used_bytes is None:
        return point
    return f"{point} ({say_bytes(mount.used_bytes)} used)"


def cause(line: DriveLine) -> str:
    """What best explains the findings, its probability and the runner-up; empty where no cause is named."""
    call = line.call
    if call is None or call.cause is None:
        return ""
    told = f"cause: {call.cause}"
    if call.cause_probability is not None:
        told += f", {call.cause_probability * 100:.0f} % likely"
    if call.cause_second is not None:
        told += f", else {call.cause_second}"
    return told


def reason(line: DriveLine) -> str:
    """The leading reason in one sentence; for a drive that was not read, why it was not."""
    last = line.last_pass
    if last is None:
        return "It has not been asked yet."
    if last.outcome is Outcome.NO_SMART and line.drive.kind is Kind.VIRTUAL:
        return "It has no SMART: watched by its traffic alone."
    if line.call is not None and (line.call.word is not CallWord.KEEP or last.explanation is None):
        return plain(line.call.reason)
    if last.explanation is not None:
        return plain(last.explanation)
    return f"The last pass ended as {last.outcome} and gave no reason."
