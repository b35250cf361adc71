"""What listening to the kernel's log brought since it was last kept, to be stored all of it or nothing."""

from collections.abc import Mapping
from dataclasses import dataclass

from diskwatch.records.daybook import Entry


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftOff:
    """How far a log was read.

    Attributes:
        log: which log: the boot that it belongs to, or the head of the file's first record.
        sequence: number of the last record that was read; -1 for none.
    """

    log: str
    sequence: int = -1


@dataclass(frozen=True, slots=True, kw_only=True)
class Listened:
    """Kept in one go with the place up to which the log was read, so that nothing is heard twice or lost.

    Attributes:
        source: the log's path.
        left_off: how far it was read.
        gathered: what has been gathered of troubles that are not over, as text.
        totals: what is counted of each drive since it is listened to, by its number and by signal.
        entries: what happened, for the day book.
    """

    source: str
    left_off: LeftOff
    gathered: str
    totals: Mapping[int, Mapping[str, int]]
    entries: tuple[Entry, ...] = ()
