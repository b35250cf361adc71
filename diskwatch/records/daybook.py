"""The day book: what happened to the drives, in order."""

from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One thing that happened.

    Attributes:
        at: when, UTC seconds since 1970.
        drive: the drive's number in the history; None where it concerns the machine or the watch itself.
        kind: ``first-seen``, ``moved``, ``pass``, ``rise``, ``reset``, ``drift``, ``kernel``, ``call``,
            ``settled``, ``ended``, ``watch`` or ``trouble``.
        text: one sentence for a person.
        data: the numbers behind it, plain JSON values.
    """

    at: int
    drive: int | None
    kind: str
    text: str
    data: Mapping[str, object] = field(default_factory=dict)
