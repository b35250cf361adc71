"""The state folder of a rehearsal: never one that holds real drives."""

from pathlib import Path

from diskwatch.errors import NothingToWorkOn, UsageError
from diskwatch.history.reader import Past
from diskwatch.places import HISTORY
from diskwatch.records import DriveLine
from diskwatch.rehearsal.scenario import MARK

_BESIDE = ("", "-wal", "-shm")
"""Endings of the files that SQLite keeps for one database."""


def invented(line: DriveLine) -> bool:
    """Whether a drive of a history is an invented one; both its names must say so."""
    identity = line.drive.identity
    return (identity.serial or "").startswith(MARK) and MARK in (identity.model or "")


def claim(folder: Path) -> bool:
    """Make a folder ready for a rehearsal; a history of an earlier one is removed, since it can be run again.

    Args:
        folder: the folder; it need not be there.

    Returns:
        Whether an earlier rehearsal was removed.

    Raises:
        UsageError: the history there holds a drive that is not invented, or somebody is writing it.
        HistoryError: there is a history that cannot be read.
    """
    try:
        with Past.open(folder) as past:
            bays = past.bays(0)
    except NothingToWorkOn:
        return False
    hint = "name an empty folder, or leave --state out"
    if bays.watcher is not None:
        raise UsageError(f"process {bays.watcher} is watching into {folder}", hint=hint)
    real = [line for line in bays.drives if not invented(line)]
    if real:
        raise UsageError(
            f"{folder} holds the history of real drives ({real[0].name}), which a rehearsal must not touch",
            hint=hint,
        )
    if not bays.drives:
        return False
    for ending in _BESIDE:
        (folder / f"{HISTORY}{ending}").unlink(missing_ok=True)
    return True
