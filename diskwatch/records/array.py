"""What a drive shares with others: an array, a pool, or a file system over several devices."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Array:
    """One such thing of which a part lies on a drive.

    Attributes:
        kind: ``md``, ``btrfs``, ``zfs`` or ``dm``.
        name: what the system calls it (``md0``, a pool's name).
        level: how it spreads data (``raid1``, ``raid5``, ``single``), or None where the kernel does not say.
        members: devices that it should have, or None.
        missing: devices that it lacks now, or None.
        rebuilding: whether a member is being filled now, or None.
        elsewhere: whether its other members hold now all that it holds here; None where that is not known.
    """

    kind: str
    name: str
    level: str | None = None
    members: int | None = None
    missing: int | None = None
    rebuilding: bool | None = None
    elsewhere: bool | None = None
