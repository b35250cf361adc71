"""What lies in a state folder is used only where it is a plain file of the right owner.

Whoever may write in a folder can lay a symbolic link or a pipe there under one of our names. A watch of root's
would then write through the link into any file of the machine, and wait at the pipe for ever.
"""

import errno
import os
import pwd
import stat
from pathlib import Path

from diskwatch.errors import HistoryError
from diskwatch.units import plain

ROOT = 0

_SORTS = (
    (stat.S_ISLNK, "a symbolic link"),
    (stat.S_ISDIR, "a folder"),
    (stat.S_ISFIFO, "a pipe"),
    (stat.S_ISSOCK, "a socket"),
)
_BESIDE = ("", "-wal", "-shm", "-journal")
"""The database and what SQLite lays beside it."""


def open_plain(path: Path, flags: int, mode: int = 0o644) -> int:
    """Open a plain file that is this user's or root's; never follows a link and never waits.

    Args:
        path: the file.
        flags: as of open(2).
        mode: rights of a file that is made.

    Returns:
        A descriptor.

    Raises:
        HistoryError: something else lies there; it is left untouched.
        OSError: it cannot be opened for another reason.
    """
    try:
        descriptor = os.open(path, flags | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC, mode)
    except OSError as error:
        # ELOOP: a link; ENXIO: a pipe that nobody reads, or a socket; EISDIR: a folder (open(2)).
        if error.errno in {errno.ELOOP, errno.ENXIO, errno.EISDIR}:
            refuse_odd(path)
        raise
    try:
        _refuse(path, os.fstat(descriptor), _trusted())
    except BaseException:
        os.close(descriptor)
        raise
    return descriptor


def refuse_odd(path: Path) -> None:
    """Refuse what is no plain file, whoever it belongs to; nothing there is no reason to refuse.

    Raises:
        HistoryError: something else lies there.
    """
    _look(path, None)


def refuse_odd_database(path: Path, *, to_write: bool) -> None:
    """Refuse a database, or a file that SQLite would use beside it, that is none, before it is opened.

    Args:
        path: the database.
        to_write: whether it must be this user's or root's, and so must its folder where root would write.

    Raises:
        HistoryError: it is refused; everything is left untouched.
    """
    if to_write:
        _refuse_folder(path.parent)
    for ending in _BESIDE:
        _look(path.with_name(path.name + ending), _trusted() if to_write else None)


def _trusted() -> frozenset[int]:
    return frozenset({os.geteuid(), ROOT})


def _look(path: Path, owners: frozenset[int] | None) -> None:
    try:
        about = path.lstat()
    except OSError:
        return  # whoever opens it says why it cannot be
    _refuse(path, about, owners)


def _refuse(path: Path, about: os.stat_result, owners: frozenset[int] | None) -> None:
    if not stat.S_ISREG(about.st_mode):
        sort = next((words for test, words in _SORTS if test(about.st_mode)), "a device")
        raise HistoryError(
            f"{plain(str(path))} is {sort} and no plain file; it is left untouched",
            hint="take it away, or name another folder with --state",
        )
    if owners is not None and about.st_uid not in owners:
        raise _not_ours(path, about.st_uid)


def _refuse_folder(folder: Path) -> None:
    """In a folder of somebody else, what root looks at can be another thing a moment later."""
    try:
        owner = folder.stat().st_uid
    except OSError:
        return
    if os.geteuid() == ROOT and owner != ROOT:
        raise _not_ours(folder, owner)


def _not_ours(path: Path, owner: int) -> HistoryError:
    try:
        name = plain(pwd.getpwuid(owner).pw_name)
    except KeyError:
        name = f"number {owner}"
    return HistoryError(
        f"{plain(str(path))} belongs to user {name}, and nothing is written there for another user",
        hint="run as that user, or name another folder with --state",
    )
