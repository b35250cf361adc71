"""The seam between the watch and a computer: what any machine, real, recorded or rehearsed, can be asked.

Nothing here raises for a drive's sake: a drive that cannot be read is a pass with an outcome, a tool that is
missing is a sentence in `Survey.troubles`.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol

from diskwatch.records import Drive, IoCounts, Pass, Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Address:
    """How smartctl reaches a drive.

    Attributes:
        node: device node or path, ``/dev/sda``, ``/dev/bus/0``.
        type: smartctl's device type (``sat``, ``nvme``, ``megaraid,7``), or None to let it find out.
    """

    node: str
    type: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Found:
    """One physical drive as the machine lists it, before it has been asked anything.

    Attributes:
        address: how to ask it.
        blocks: kernel names of its block devices (``sda``; several namespaces of one NVMe drive); empty for a
            drive behind a controller.
        place: where it is.
        drive: what the kernel alone knows of it (identity from sysfs where it has one).
        asleep: True where the kernel itself says that the device is suspended: it must not be asked.
        expects_smart: False where the kernel shows that it cannot have SMART (a virtual disk).
        instance: as in `Counted`; empty where nobody tells instances apart.
        adapter: the USB adapter before it: its ids, revision and serial (``152d:0578:1402 0123``), or None.
        has_statistics: whether an ATA drive's IDENTIFY data, as the kernel keeps them, say that it has Device
            Statistics (log 04h); None where they say nothing.
    """

    address: Address
    blocks: tuple[str, ...]
    place: Place
    drive: Drive
    asleep: bool = False
    expects_smart: bool = True
    instance: str = ""
    adapter: str | None = None
    has_statistics: bool | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Survey:
    """All physical drives of a machine, each once.

    Attributes:
        found: the drives, in a stable order.
        troubles: what kept the survey from being complete, one sentence each with what to do.
    """

    found: tuple[Found, ...]
    troubles: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Counted:
    """A block device's totals, and which device they belong to.

    Attributes:
        counts: totals since the device appeared.
        instance: changes whenever another device, or the same after a boot or a re-plug, stands under the name;
            totals of different instances must never be subtracted.
        in_flight: requests that the drive has been handed and has not answered, at the moment of the look; None
            where the kernel does not say.
    """

    counts: IoCounts
    instance: str
    in_flight: int | None = None


class Machine(Protocol):
    """What the watch needs of a computer."""

    def survey(self) -> Survey:
        """List the physical drives, opening none of them."""
        ...

    def ask(self, found: Found) -> Pass:
        """Ask one drive for its readings; bounded in time; safe to call from several threads, one a drive."""
        ...

    def counts(self) -> Mapping[str, Counted]:
        """Traffic totals by kernel name of the block device."""
        ...

    def stop(self) -> None:
        """End every question that is still under way, at once; later questions answer without asking."""
        ...
