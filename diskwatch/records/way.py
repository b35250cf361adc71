"""How drives behind a USB adapter are reached."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Way:
    """What was found out about one adapter; it belongs to the machine and to none of its drives.

    Attributes:
        adapter: the adapter's ids, revision and serial (``152d:0578:1402 0123``).
        instance: the device on which it was found out; changes with every plugging in and every boot.
        type: the device type of smartctl that worked; None where none does.
    """

    adapter: str
    instance: str
    type: str | None
