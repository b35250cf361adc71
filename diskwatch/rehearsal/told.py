"""What an invented drive would state of itself, before it is put into smartctl's words."""

from collections.abc import Mapping
from dataclasses import dataclass

from diskwatch.records import SelfTest


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row of an ATA drive's attribute table.

    Attributes:
        number: attribute id.
        name: the name that smartctl prints beside it.
        raw: raw value.
        value: normalised value now.
        worst: lowest normalised value so far.
        threshold: limit at or below which the drive calls it failed; 0 never fails.
        prefail: whether that predicts failure.
    """

    number: int
    name: str
    raw: int
    value: int = 100
    worst: int = 100
    threshold: int = 0
    prefail: bool = False

    @property
    def failing(self) -> str:
        """``now``, ``past`` or nothing, as smartctl's document has it."""
        if self.threshold > 0 and self.value <= self.threshold:
            return "now"
        return "past" if self.threshold > 0 and self.worst <= self.threshold else ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Logged:
    """An entry of the NVMe error information log.

    Attributes:
        count: which error of the drive's life it was.
        lba: first block that could not be read; None where a command was refused, as at every start.
    """

    count: int
    lba: int | None = None

    @property
    def status(self) -> int:
        """The status field without its phase tag: unrecovered read error (2h, 81h) or invalid field (0h, 02h).

        More such entries follow where bit 13 is set (NVM Express Base Specification, status field).
        """
        return 0x2002 if self.lba is None else 0x2281


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """All that a drive states in one answer.

    Attributes:
        model: model.
        serial: serial.
        number: what its world-wide name ends in.
        firmware: firmware revision.
        capacity: bytes.
        rpm: turns a minute; 0 for a solid-state drive with an ATA interface, None for NVMe.
        hours: powered hours.
        cycles: times it was powered up.
        celsius: temperature.
        limit: its own temperature limit for a warning, °C.
        passed: its own verdict.
        rows: attribute table; empty for NVMe.
        log: fields of the NVMe health log by smartctl's key; empty for ATA.
        errors: entries that the NVMe error log still keeps, newest first.
        tests: self-tests, newest first.
    """

    model: str
    serial: str
    number: int
    firmware: str
    capacity: int
    rpm: int | None
    hours: int
    cycles: int
    celsius: int
    limit: int
    passed: bool
    rows: tuple[Row, ...] = ()
    log: Mapping[str, int]
    errors: tuple[Logged, ...] = ()
    tests: tuple[SelfTest, ...] = ()

    @property
    def nvme(self) -> bool:
        """Whether it speaks NVMe."""
        return self.rpm is None
