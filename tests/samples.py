"""Invented drives and readings for tests. Makers, models and serials are made up."""

from dataclasses import replace

from diskwatch.records import (
    Attribute,
    Drive,
    Failing,
    Identity,
    Kind,
    Outcome,
    Pass,
    Place,
    Reading,
    SelfTest,
    SignalKind,
    Value,
)

DAY = 86_400
NOON = 20_000 * DAY + DAY // 2
"""A time to begin at: noon of a day, so that hours may pass within it."""

HDD = Drive(
    identity=Identity(
        wwn="naa.5f00d00000000001", model="Nordwall NW4000 INVENTED", serial="INV0001", path="/dev/sda"
    ),
    kind=Kind.HDD,
    firmware="A1",
    capacity_bytes=4_000_000_000_000,
    rotation_rpm=7200,
)
SSD = Drive(
    identity=Identity(
        wwn="naa.5f00d00000000002", model="Kestrel K500 INVENTED", serial="INV0002", path="/dev/sdb"
    ),
    kind=Kind.SSD,
    capacity_bytes=500_000_000_000,
)
NVME = Drive(
    identity=Identity(
        wwn="eui.00f00d0000000003", model="Borealis B1 INVENTED", serial="INV0003", path="/dev/nvme0"
    ),
    kind=Kind.NVME,
    capacity_bytes=1_000_000_000_000,
)
VIRTUAL = Drive(
    identity=Identity(wwn=None, model="virtual disk", serial=None, path="/dev/vda"),
    kind=Kind.VIRTUAL,
    capacity_bytes=10_000_000_000,
)
HERE = Place(device="/dev/sda", bay="pci-0000:00:17.0-ata-1")

_GAUGES = {
    "temperature": ("celsius", SignalKind.GAUGE),
    "power-on-hours": ("hours", SignalKind.TIME),
    "percentage-used": ("percent", SignalKind.WEAR),
    "available-spare": ("percent", SignalKind.WEAR),
    "spare-threshold": ("percent", SignalKind.WEAR),
    "critical-warning": ("bits", SignalKind.GAUGE),
    "self-assessment": ("", SignalKind.WORD),
}


def value(signal: str, amount: int | str | None) -> Value:
    """A value of a signal; names with underscores become the signal's."""
    unit, kind = _GAUGES.get(signal, ("events", SignalKind.COUNT))
    reason = "not told" if amount is None else None
    return Value(signal=signal, value=amount, unit=unit, kind=kind, source="invented", reason=reason)


def reading(
    *,
    attributes: tuple[Attribute, ...] = (),
    self_tests: tuple[SelfTest, ...] = (),
    warning_celsius: int | None = None,
    **signals: int | str | None,
) -> Reading:
    """A reading from signals written with underscores: ``pending_sectors=8``."""
    return Reading(
        values=tuple(value(name.replace("_", "-"), amount) for name, amount in signals.items()),
        attributes=attributes,
        self_tests=self_tests,
        warning_celsius=warning_celsius,
    )


def read(at: int, drive: Drive = HDD, **signals: object) -> Pass:
    """A pass that brought a reading."""
    return Pass(at=at, outcome=Outcome.READ, drive=drive, reading=reading(**signals))  # type: ignore[arg-type]


def missed(at: int, outcome: Outcome, drive: Drive = HDD) -> Pass:
    """A pass that brought none."""
    return Pass(at=at, outcome=outcome, explanation=f"It is {outcome.value}.", drive=drive)


def attribute(number: int, *, failing: Failing | None = None, prefail: bool = True) -> Attribute:
    """An attribute's row."""
    return Attribute(
        number=number,
        name=f"Invented_{number}",
        value=41 if failing else 100,
        worst=41,
        threshold=140 if failing else 10,
        prefail=prefail,
        raw="1265",
        failing=failing,
    )


def with_serial(drive: Drive, serial: str, path: str) -> Drive:
    """Another drive of the same model."""
    return replace(drive, identity=Identity(wwn=None, model=drive.identity.model, serial=serial, path=path))
