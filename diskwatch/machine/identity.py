"""Whether two descriptions mean the same physical drive. Pure.

The order of trust: a world-wide name, then serial with model, then (weakly) the path. A description is never
trusted blindly: bridges and cheap drives ship names that many units share.
"""

from collections.abc import Iterable

from diskwatch.records import Identity, KnownDrive
from diskwatch.records.placeholders import empty_wwn

_CUT = 16
"""Letters of the model field in SCSI INQUIRY data (SPC), to which a drive's model may have been cut."""

_RUNS = ("0123456789abcdef", "123456789abcdef0", "1234567890")


def same(a: Identity, b: Identity) -> bool:
    """Whether two identities mean one drive.

    World-wide names are compared where both have one of the same sort (scheme and length; an NVMe namespace
    has up to four names, and who tells decides which). Equal names with different serials are two drives that
    share a name. Without a name to compare, serial and model must be equal. Where neither has a name or a
    serial, the path decides, unless the models differ.
    """
    return _closeness(a, b) > 0


def recognise(
    told: Identity, known: Iterable[KnownDrive], *, here: KnownDrive | None = None
) -> KnownDrive | None:
    """Find the known drive that an identity means.

    Args:
        told: what the drive, or the kernel, says of it.
        known: all drives that the history knows, in any order.
        here: the drive that this very instance of the device (`diskwatch.machine.protocol.Counted.instance`)
            was last recognised as, where the caller knows. It settles what the words leave open: a drive first
            known by its path alone that now tells its name, or one that has fallen silent.

    Returns:
        The drive, or None where it is new, or where several fit equally: to start a new history is a smaller
        evil than to pour two drives' histories into one.
    """
    if here is not None and _bare(told) and _agree(told.model, here.drive.identity.model):
        return here  # ahead of the path: paths are handed on from drive to drive
    ranked = [(_closeness(told, one.drive.identity), one) for one in known]
    best = max((rank for rank, _ in ranked), default=0)
    if best > 0:
        return _only([one for rank, one in ranked if rank == best], told.path)
    if here is not None and _bare(here.drive.identity) and _agree(told.model, here.drive.identity.model):
        return here
    return None


def serial_of(identity: Identity) -> str | None:
    """The serial for comparison: blanks and case folded; None where it is missing or a placeholder."""
    serial = _fold(identity.telling_serial)
    if serial is None:
        return None
    # Bridges that invent a serial count upwards; a drive that also names its model is believed.
    if _fold(identity.model) is None and len(serial) >= 6 and any(run.startswith(serial) for run in _RUNS):
        return None
    return serial


def wwn_of(identity: Identity) -> str | None:
    """The world-wide name for comparison; None where it is missing or a placeholder."""
    return None if empty_wwn(identity.wwn) else _fold(identity.wwn)


def _closeness(a: Identity, b: Identity) -> int:
    """0 for different drives; the more surely the same, the higher. Symmetric."""
    wwn_a, wwn_b, serial_a, serial_b = wwn_of(a), wwn_of(b), serial_of(a), serial_of(b)
    if wwn_a is not None and wwn_b is not None and _sort(wwn_a) == _sort(wwn_b):
        if wwn_a != wwn_b or (serial_a is not None and serial_b is not None and serial_a != serial_b):
            return 0
        # A serial on one side only fits less well than both, or neither, having the same.
        return 4 if serial_a == serial_b else 3
    if serial_a is not None and serial_b is not None:
        return 2 if serial_a == serial_b and _same_model(a.model, b.model) else 0
    if _bare(a) and _bare(b):
        return 1 if a.path == b.path and _agree(a.model, b.model) else 0
    return 0


def _bare(identity: Identity) -> bool:
    """Whether only its path tells the drive, placeholders not counted."""
    return wwn_of(identity) is None and serial_of(identity) is None


def _sort(wwn: str) -> tuple[str, int]:
    return wwn.partition(".")[0], len(wwn)


def _same_model(a: str | None, b: str | None) -> bool:
    one, other = _fold(a), _fold(b)
    if one is None or other is None:
        return one == other
    short, long = sorted((one, other), key=len)
    # The kernel's SCSI face cuts an ATA model to its first 16 letters (15 where the last was a blank).
    return short == long or (len(short) in {_CUT, _CUT - 1} and long.startswith(short))


def _agree(a: str | None, b: str | None) -> bool:
    """Whether two models do not contradict each other."""
    return _fold(a) is None or _fold(b) is None or _same_model(a, b)


def _fold(text: str | None) -> str | None:
    return (" ".join(text.split()).casefold() or None) if text is not None else None


def _only(drives: list[KnownDrive], path: str) -> KnownDrive | None:
    if len(drives) > 1:
        drives = [one for one in drives if one.place.device == path]
    return drives[0] if len(drives) == 1 else None
