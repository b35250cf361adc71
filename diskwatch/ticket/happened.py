"""What happened to the drive, in order: rises, errors the kernel saw, moves, calls, what the owner did."""

from collections.abc import Sequence

from diskwatch.records import Entry
from diskwatch.ticket.part import Json, Part, at, plain_data, short


def events_part(entries: Sequence[Entry], before: int | None, most: int) -> tuple[Part, int]:
    """The drive's entries of the day book, and how many were left out.

    Args:
        entries: oldest first.
        before: leave out what is earlier, UTC seconds since 1970; None for nothing.
        most: how many of the newest at most.
    """
    kept = [one for one in entries if before is None or one.at >= before]
    kept = kept[max(0, len(kept) - most) :]
    return Part(value=[_told(one) for one in kept]), len(entries) - len(kept)


def _told(entry: Entry) -> Json:
    return {
        "at": at(entry.at),
        "kind": short(entry.kind),
        "text": short(entry.text),
        "data": plain_data(entry.data),
    }
