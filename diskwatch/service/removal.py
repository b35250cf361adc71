"""The history moves house, and says so in its day book; nobody may be writing it."""

from contextlib import suppress
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.history.relocation import Moved, move
from diskwatch.history.writer import History
from diskwatch.records import Entry
from diskwatch.service.requests import Answer
from diskwatch.units import plain

MOVE = "move-history"
"""The name of the request."""


def move_house(folder: Path, to: Path, at: int) -> tuple[Moved, Answer]:
    """Move a history, and note it where it lies now.

    Args:
        folder: where it lies.
        to: where it is to lie.
        at: now, UTC seconds since 1970.

    Returns:
        What became of it, and the same for the person.

    Raises:
        DiskwatchError: it was not moved; the old one stays in use.
    """
    moved = move(folder, to, at)
    data = {"from": str(moved.source), "to": str(moved.to), "rows": moved.rows}
    # That it cannot be noted (the disk is full by now, another watch was quicker) undoes no move.
    with suppress(DiskwatchError), History.open(moved.to) as history:
        history.note(Entry(at=at, drive=None, kind="watch", text=moved.sentence(), data=data))
    there = plain(str(moved.to))
    told = [
        moved.sentence(),
        f"Every command finds it there from now on; a service needs the right to write {there}.",
    ]
    if moved.same_file_system:
        told.append("Both folders lie in one file system, so it lies on the same drive still.")
    return moved, Answer(done=tuple(told))
