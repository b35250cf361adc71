"""Which of smartctl's device types reaches a drive: what to try, and what was found to work.

smartctl finds the type out by itself for most drives, but not behind a USB adapter that its table lacks, and a
scan that opens nothing calls every disk a SCSI one. Finding out costs several questions, and some types send an
adapter commands of another maker; so it is done once, and no more while the device stays plugged in. What holds
for an adapter outlives the watch: whoever keeps it hands it back at the next start.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass, replace

from diskwatch.machine.endings import Verdict
from diskwatch.machine.held import Family
from diskwatch.machine.protocol import Found
from diskwatch.machine.reading import Support, Understood
from diskwatch.records import Kind, Outcome, Way

USB_TYPES = ("sat", "scsi", "sntasmedia", "sntjmicron", "sntrealtek")
"""What can be behind a USB adapter, in the order in which it is tried: the types of smartctl 7.3 that are no
more than another way to carry the same commands. The old ones that only their own adapters understand are left
to smartctl's table."""

_OWN = {"174c": "sntasmedia", "152d": "sntjmicron", "0bda": "sntrealtek"}
"""USB vendor ids (memory) of the three makers whose adapters these types speak to."""

TYPE = re.compile(r"[A-Za-z0-9][A-Za-z0-9,+/_-]{0,60}")
"""What a device type looks like; anything else is none and is never handed to a command."""

_BEHIND_SAT = "probable ata device behind a sat layer"
_OVER_SAT = ("megaraid,", "sssraid,", "cciss,")


def others(
    found: Found, type_: str | None, said: tuple[str, ...], verdict: Verdict, what: Understood
) -> tuple[str, ...]:
    """The types that may do better than the one just asked with, in the order in which to try them.

    Args:
        found: the drive.
        type_: the type that it was asked with; None where smartctl was left to find out.
        said: every line of the answer.
        verdict: how that question ended.
        what: what was understood of the answer.
    """
    lower = [line.lower() for line in said]
    vendor = (what.drive.identity.model or "").split(" ")[0] if what.drive is not None else None
    if type_ is not None and (
        any(_BEHIND_SAT in line for line in lower) or (what.family is Family.SCSI and vendor == "ATA")
    ):
        better = _over_sat(type_)
        if better is not None:
            return (better,)
    usb = found.drive.kind is Kind.USB or any("unknown usb bridge" in line for line in lower)
    if usb and unanswered(verdict, what):
        return tuple(one for one in usb_types(found) if one != type_)
    return ()


def unanswered(verdict: Verdict, what: Understood) -> bool:
    """Whether another type may bring what this one did not."""
    # Every SCSI device says who it is, an adapter too; one that says it as ATA or NVMe is the drive itself.
    itself = what.support is Support.OFF or (what.drive is not None and what.family is not Family.SCSI)
    silent = verdict.outcome in {Outcome.GARBLED, Outcome.NO_SMART} or verdict.unproved
    return silent and not itself


def usb_types(found: Found) -> tuple[str, ...]:
    """The types to try behind a USB adapter; of those for one maker's adapters only its own, where it is known.

    They are commands that another maker's adapter may take for something else.
    """
    own = _OWN.get((found.adapter or "").partition(":")[0])
    return tuple(one for one in USB_TYPES if own is None or one in {"sat", "scsi", own})


def reaches(verdict: Verdict) -> bool:
    """Whether a question got through: a drive that says that it is in standby has answered too."""
    return verdict.outcome is Outcome.READ or (verdict.outcome is Outcome.ASLEEP and not verdict.unproved)


@dataclass(frozen=True, slots=True)
class _Way:
    """What is known of the device under a node: which instance it is, its type, and whether all were tried."""

    instance: str
    type: str | None = None
    tried: bool = False


class Ways:
    """Remembers types: by instance of the device, and for a device's next coming by its adapter."""

    def __init__(self, kept: Iterable[Way] = ()) -> None:
        """Begin with what an earlier watch found out.

        Args:
            kept: one an adapter.
        """
        self._ways: dict[str, _Way] = {}
        self._adapters = {one.adapter: one for one in kept if one.type is None or TYPE.fullmatch(one.type)}
        self._news: dict[str, Way] = {}

    def known(self, found: Found) -> str | None:
        """The type that reached this drive before, or one behind the same adapter; None where none is known."""
        way = self._way(found)
        if way.type is None and not way.tried:
            kept = self._kept(found)
            return kept.type if kept is not None else None
        return way.type

    def handed_down(self, found: Found) -> bool:
        """Whether the type that is known is only that of an earlier coming, or of an earlier watch."""
        return self._own(found) is None and self.known(found) is not None

    def tried(self, found: Found) -> bool:
        """Whether the types were tried out on this instance already."""
        return self._way(found).tried

    def proved(self, found: Found) -> bool:
        """Whether this very instance answered to the type that is known."""
        return self._way(found).type is not None

    def closed(self, found: Found) -> bool:
        """Whether no type reaches this instance."""
        way = self._way(found)
        return way.tried and way.type is None

    def found_by_itself(self, found: Found, type_: str) -> None:
        """Keep the type that smartctl found, since finding out again may wake the drive."""
        self._keep(found, replace(self._way(found), type=type_))

    def settled(self, found: Found, type_: str | None) -> None:
        """Keep what trying out came to; None where no type reaches the drive."""
        self._keep(found, _Way(_instance(found), type_, tried=True))

    def failed(self, found: Found) -> None:
        """Forget a type that was handed down or found by smartctl and fails; what was tried out stays."""
        if not self._way(found).tried:
            self._ways.pop(_key(found), None)
            if found.adapter is not None:
                self._adapters.pop(found.adapter, None)

    def news(self, found: Found) -> Way | None:
        """What was found out of a drive's adapter since this was asked last, to be kept; None for nothing."""
        return self._news.pop(_key(found), None)

    def _keep(self, found: Found, way: _Way) -> None:
        self._ways[_key(found)] = way
        if found.adapter is None:
            return
        new = Way(adapter=found.adapter, instance=way.instance, type=way.type)
        if self._kept(found) != new:
            self._adapters[found.adapter] = new
            self._news[_key(found)] = new

    def _way(self, found: Found) -> _Way:
        own, instance, kept = self._own(found), _instance(found), self._kept(found)
        if own is not None:
            return own
        if kept is None or kept.instance != instance:
            return _Way(instance)
        # The same device as before the watch began anew. Where its type fails, others may be tried once more.
        return _Way(instance, kept.type, tried=kept.type is None)

    def _own(self, found: Found) -> _Way | None:
        """By address, so that what is kept does not grow with every plugging in."""
        way = self._ways.get(_key(found))
        return way if way is not None and way.instance == _instance(found) else None

    def _kept(self, found: Found) -> Way | None:
        return None if found.adapter is None else self._adapters.get(found.adapter)


def _over_sat(type_: str) -> str | None:
    """The same way, to an ATA drive at its end; None where there is none."""
    if type_ == "scsi":
        return "sat"
    return f"sat+{type_}" if type_.startswith(_OVER_SAT) else None


def _key(found: Found) -> str:
    return f"{found.address.node} {found.address.type or ''}"


def _instance(found: Found) -> str:
    """Where the machine does not tell instances apart, the drive's own name has to do."""
    who = found.drive.identity
    return found.instance or "\0".join((who.wwn or "", who.model or "", who.serial or ""))
