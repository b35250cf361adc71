"""Who a drive says it is, and how that goes together with what the kernel says of it."""

import re
from dataclasses import replace

from diskwatch.machine.document import Document, dig, number_at, rows_at, text_at
from diskwatch.machine.held import Family
from diskwatch.machine.text import Sheet, whole
from diskwatch.records import Drive, Identity, Kind

_NOT_TOLD = "[no information found]"
"""smartctl's own words where a drive left a field empty."""

_VIRTUAL = re.compile(
    r"\b(?:qemu|vbox|virtualbox|vmware|virtio|msft virtual|virtual (?:disk|hd|drive)|logical volume|"
    r"raid (?:volume|array|[0-9]+))\b",
    re.IGNORECASE,
)
"""How virtual machines and controllers name the disks that they make up (practice)."""

_LONGEST = 120
"""Letters: ATA and NVMe have room for 40, SCSI for fewer; nothing longer is a name."""

_RANK = (Kind.VIRTUAL, Kind.NVME, Kind.USB)


_KEYS = {
    "ata_smart_attributes": Family.ATA,
    "ata_version": Family.ATA,
    "nvme_smart_health_information_log": Family.NVME,
    "nvme_version": Family.NVME,
    "scsi_product": Family.SCSI,
    "scsi_error_counter_log": Family.SCSI,
}
_WORDS = (
    (Family.NVME, ("NVMe Version", "NVMe Log 0x02", "Namespace 1 ")),
    (Family.ATA, ("ATA Version is", "SMART Attributes with Thresholds", "Device Model")),
    (Family.SCSI, ("Transport protocol", "Logical Unit id", "SMART Health Status", "Error counter log")),
)


def family_of(document: Document | None, sheet: Sheet, type_: str | None) -> Family:
    """Which language the drive speaks.

    What was answered shows it best: a controller is asked in one language and its drives may answer in another.
    Only where nothing was, the protocol that smartctl names decides, and last the type that was asked with.
    """
    for key, family in _KEYS.items():
        if dig(document, key) is not None:
            return family
    for family, words in _WORDS:
        if sheet.holds(*words):
            return family
    protocol = (text_at(document, "device", "protocol") or "").upper()
    if protocol in Family.__members__:
        return Family[protocol]
    if type_ is not None and type_.startswith(("nvme", "snt")):
        return Family.NVME
    return Family.SCSI if type_ is not None and type_.startswith("scsi") else Family.ATA


def drive_of(family: Family, document: Document | None, sheet: Sheet, path: str) -> Drive | None:
    """The drive as it describes itself.

    Args:
        family: which language it speaks.
        document: smartctl's document, or None.
        sheet: the plain text.
        path: where it answered.

    Returns:
        The drive, or None where it states neither a model nor a serial nor a world-wide name.
    """
    identity = Identity(
        wwn=_wwn(family, document, sheet),
        model=_model(family, document, sheet),
        serial=serial_of(text_at(document, "serial_number") or sheet.get("Serial Number")),
        path=path,
    )
    if identity.model is None and identity.weak:
        return None
    turns = _turns(document, sheet)
    return Drive(
        identity=identity,
        kind=_kind(family, sheet, identity, turns),
        firmware=_name(
            text_at(document, "firmware_version")
            or text_at(document, "scsi_revision")
            or sheet.get("Firmware Version", "Revision")
        ),
        capacity_bytes=_capacity(document, sheet),
        rotation_rpm=turns or None,
    )


def merged(found: Drive, told: Drive) -> Drive:
    """One drive out of what the kernel knows of it and what it says of itself.

    The drive's own words come first, since they do not change with the port; but an NVMe drive keeps the name
    that the kernel formed, which prefers a longer identifier than smartctl prints, and only the kernel knows
    that something hangs on USB.

    Args:
        found: from the kernel.
        told: from the drive.
    """
    kind = _merged_kind(found, told)
    mine, kernel = told.identity, found.identity
    by_kernel = kind is Kind.NVME and kernel.wwn is not None
    return Drive(
        identity=replace(
            kernel,
            wwn=kernel.wwn if by_kernel else (mine.wwn or kernel.wwn),
            model=mine.model or kernel.model,
            serial=mine.telling_serial or kernel.telling_serial or mine.serial or kernel.serial,
        ),
        kind=kind,
        firmware=told.firmware or found.firmware,
        capacity_bytes=told.capacity_bytes or found.capacity_bytes,
        rotation_rpm=None if kind in {Kind.SSD, Kind.NVME} else told.rotation_rpm or found.rotation_rpm,
    )


def serial_of(text: str | None) -> str | None:
    """A serial as the drive states it, also one that stands for nothing; None where it states none."""
    name = _name(text)
    return None if name is None or name.lower() == _NOT_TOLD else name


def is_flash(drive: Drive | None) -> bool:
    """Whether a drive says that it is solid state."""
    return drive is not None and drive.kind is Kind.SSD


def _merged_kind(found: Drive, told: Drive) -> Kind:
    for kind in _RANK:
        if kind in {found.kind, told.kind}:
            return kind
    # A drive that names no turns may be either; then what the kernel thinks of the queue decides.
    if told.kind is Kind.HDD and told.rotation_rpm is None and found.kind is Kind.SSD:
        return Kind.SSD
    return told.kind


def _name(text: str | None) -> str | None:
    """A name without outer blanks, and without what no name holds; None where nothing is left of it.

    Broken firmware or a flipped bit may set a letter in it that cannot be shown; the rest still tells the drive
    from others, unless it is a single letter.
    """
    told = (text or "").strip(" \0")
    shown = "".join(letter for letter in told if letter.isprintable()).strip()
    least = 1 if shown == told else 2
    return shown if least <= len(shown) <= _LONGEST else None


def _model(family: Family, document: Document | None, sheet: Sheet) -> str | None:
    if family is Family.SCSI:
        vendor = text_at(document, "scsi_vendor") or sheet.get("Vendor")
        product = text_at(document, "scsi_product") or sheet.get("Product")
        names = [name for part in (vendor, product) if (name := _name(part)) is not None]
        if names:
            return " ".join(names)
    told = text_at(document, "model_name") or text_at(document, "scsi_model_name")
    return _name(told) or _name(sheet.get("Device Model", "Model Number"))


def _wwn(family: Family, document: Document | None, sheet: Sheet) -> str | None:
    if family is Family.NVME:
        return _namespace_name(document, sheet)
    parts = [number_at(document, "wwn", key) for key in ("naa", "oui", "id")]
    naa, oui, own = parts
    if naa is not None and oui is not None and own is not None:
        return _naa(f"{naa:x}{oui:06x}{own:09x}")
    printed = sheet.get("LU WWN Device Id")
    if printed is not None:
        found = re.fullmatch(r"([0-9a-f]) ([0-9a-f]{6}) ([0-9a-f]{9})", printed)
        return _naa("".join(found.groups())) if found is not None else None
    unit = text_at(document, "logical_unit_id") or sheet.get("Logical Unit id") or ""
    return _naa(unit.lower().removeprefix("0x"))


def _naa(digits: str) -> str | None:
    """A name of the NAA kind: 64 bits that begin with 2, 3 or 5, or 128 that begin with 6 (memory: SPC)."""
    usual = re.fullmatch(r"[235][0-9a-f]{15}|6[0-9a-f]{31}", digits)
    return f"naa.{digits}" if usual is not None and digits[1:].strip("0") else None


def _namespace_name(document: Document | None, sheet: Sheet) -> str | None:
    """The EUI-64 of an NVMe drive's first namespace."""
    for row in rows_at(document, "nvme_namespaces"):
        oui, own = number_at(row, "eui64", "oui"), number_at(row, "eui64", "ext_id")
        if oui is not None and own is not None:
            return _eui(f"{oui:06x}{own:010x}")
    found = re.fullmatch(r"([0-9a-f]{6}) ([0-9a-f]{10})", sheet.get("Namespace 1 IEEE EUI-64") or "")
    return _eui("".join(found.groups())) if found is not None else None


def _eui(digits: str) -> str | None:
    return f"eui.{digits}" if len(digits) == 16 and digits.strip("0") else None


def _capacity(document: Document | None, sheet: Sheet) -> int | None:
    told = (
        number_at(document, "nvme_total_capacity"),
        number_at(document, "user_capacity", "bytes"),
        *(
            whole(sheet.get(label) or "")
            for label in (
                "User Capacity",
                "Total NVM Capacity",
                "Namespace 1 Size/Capacity",
                "Namespace 1 Size",
            )
        ),
    )
    return next((size for size in told if size is not None and size > 0), None)


def _turns(document: Document | None, sheet: Sheet) -> int | None:
    """Turns a minute; 0 for a drive that says it has none; None where it does not say."""
    told = number_at(document, "rotation_rate")
    if told is not None:
        return told if 0 <= told < 65_535 else None
    printed = sheet.get("Rotation Rate") or ""
    if printed.lower().startswith("solid state"):
        return 0
    found = re.fullmatch(r"([0-9]{3,5}) rpm", printed)
    return int(found[1]) if found is not None else None


def _kind(family: Family, sheet: Sheet, identity: Identity, turns: int | None) -> Kind:
    if _VIRTUAL.search(identity.model or "") is not None or _made_up(family, sheet, identity):
        return Kind.VIRTUAL
    if family is Family.NVME:
        return Kind.NVME
    if family is Family.SCSI:
        return Kind.SAS  # not every one names its transport; what hangs on USB, only the kernel knows
    if turns == 0 or (turns is None and sheet.get("TRIM Command") is not None):
        return Kind.SSD
    return Kind.HDD


def _made_up(family: Family, sheet: Sheet, identity: Identity) -> bool:
    """Whether a controller shows a volume of its own as a disk.

    Such volumes have no SMART and carry names of the long NAA form (6), which is meant for volumes; a drive's
    own is short (practice).
    """
    return (
        family is Family.SCSI
        and (identity.wwn or "").startswith("naa.6")
        and sheet.holds("device lacks SMART capability")
    )
