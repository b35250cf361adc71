"""The state folder of a rehearsal: never one that holds real drives."""

from pathlib import Path

from diskwatch.errors import HistoryError, NothingToWorkOn, UsageError
from diskwatch.history.reader import Past
from diskwatch.places import HISTORY
from diskwatch.records import DriveLine, Entry
from diskwatch.rehearsal.scenario import MARK

_BESIDE = ("", "-wal", "-shm")
"""Endings of the files that SQLite keeps for one database."""

_KIND, _REHEARSAL = "watch", "rehearsal"
"""Kind of the day book's entry that marks a history as a rehearsal's, and the key of its data that does."""


def invented(line: DriveLine) -> bool:
    """Whether a drive of a history is an invented one; both its names must say so."""
    identity = line.drive.identity
    return (identity.serial or "").startswith(MARK) and MARK in (identity.model or "")


def begun(title: str, at: int) -> Entry:
    """The line of the day book that a rehearsal's history begins with; without it no rehearsal removes one.

    Args:
        title: the scenario's title.
        at: when it begins, UTC seconds since 1970 of its own clock.
    """
    text = f"A rehearsal began ({title}): every drive in this history is {MARK}."
    return Entry(at=at, drive=None, kind=_KIND, text=text, data={_REHEARSAL: True})


def _is_marked(past: Past) -> bool:
    entries = past.day_book(kinds=(_KIND,))
    return any(entry.drive is None and entry.data.get(_REHEARSAL) is True for entry in entries)


def holds_rehearsal(folder: Path) -> bool:
    """Whether a folder keeps a rehearsal and nothing else, so that no real drive may be watched into it.

    Args:
        folder: the folder; one without a history, or with one that cannot be read, keeps none.
    """
    try:
        with Past.open(folder) as past:
            return _is_marked(past) and all(invented(line) for line in past.bays(0).every)
    except (HistoryError, NothingToWorkOn):
        return False


def claim(folder: Path) -> bool:
    """Make a folder ready for a rehearsal; a history of an earlier one is removed, since it can be run again.

    Nothing is removed that lacks the mark of a rehearsal, or that knows of one real drive, also of one whose
    place another drive has taken by its owner's word.

    Args:
        folder: the folder; it need not be there.

    Returns:
        Whether an earlier rehearsal was removed.

    Raises:
        UsageError: the history there holds a drive that is not invented, is none of a rehearsal, or somebody
            is writing it.
        HistoryError: there is a history that cannot be read.
    """
    try:
        with Past.open(folder) as past:
            bays = past.bays(0)
            marked = _is_marked(past)
    except NothingToWorkOn:
        return False
    hint = "name an empty folder, or leave --state out"
    if bays.watcher is not None:
        raise UsageError(f"process {bays.watcher} is watching into {folder}", hint=hint)
    real = [line for line in bays.every if not invented(line)]
    if real:
        raise UsageError(
            f"{folder} holds the history of real drives ({real[0].name}), which a rehearsal must not touch",
            hint=hint,
        )
    if not marked:
        raise UsageError(
            f"{folder} holds a history that no rehearsal began, and a rehearsal must not touch it", hint=hint
        )
    for ending in _BESIDE:
        (folder / f"{HISTORY}{ending}").unlink(missing_ok=True)
    return True
