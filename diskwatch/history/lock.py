"""One writer a history: a lock that the kernel takes back whenever its holder ends, however it ends.

Two files, since a lock that others may look at is a lock that they may take: a shared record lock needs no more
than the right to read, and it would keep the watch out for as long as its holder likes.

* ``write.lock``, which only its owner may open, carries the lock that decides. Nobody else can be in its way.
* ``watch.lock``, which everybody may read, says who watches. The watch locks that one too where it can, but
  rests nothing on it; a reader believes an exclusive lock, which needs the right to write, or else the process
  that the file names, as long as that very process lives and is the owner's or root's.

Record locks are lost as soon as their process closes *any* descriptor of the file; so within the process that
holds them nobody opens the files again, and this module remembers what is held.
"""

import errno
import fcntl
import json
import os
import stat
import struct
import threading
import time
from contextlib import suppress
from pathlib import Path
from typing import Any

from diskwatch.errors import HistoryHeld
from diskwatch.history.guarding import ROOT, open_plain
from diskwatch.history.mishaps import told
from diskwatch.history.processes import lives, this_process, written
from diskwatch.places import HISTORY, WATCH_LOCK, WRITE_LOCK
from diskwatch.units import plain

_FLOCK = "hhqqi4x"
"""Linux's ``struct flock``: type, whence, start, length, process; native sizes and gaps (fcntl(2))."""

_NO_ROOM = frozenset({errno.ENOSPC, errno.EDQUOT})

_Key = tuple[int, int]

_guard = threading.Lock()
_held: dict[_Key, int] = {}
"""Locks held here, by device and inode; the process number, since a forked child inherits this but no lock."""


class WatchLock:
    """The right to write one history, for as long as this object is not released."""

    def __init__(self, right: int, notice: int | None) -> None:
        self._right = right
        self._notice = notice
        self._keys = tuple(_key(os.fstat(one)) for one in (right, notice) if one is not None)
        _held.update(dict.fromkeys(self._keys, os.getpid()))

    @classmethod
    def take(cls, folder: Path) -> "WatchLock":
        """Take the right to write the history in a folder.

        That the disk has no room for the line that says who watches is no reason to give the right up: two
        would write then.

        Raises:
            HistoryHeld: another process, or this one already, writes it; its number is named.
            HistoryError: the lock file cannot be written, or is none of ours.
        """
        with _guard:
            if _is_ours(folder):
                raise _is_held(folder, os.getpid())
            right = _right(folder)
            try:
                return cls(right, _notice(folder / WATCH_LOCK))
            except BaseException:
                os.close(right)
                raise

    def release(self) -> None:
        """Let others write; the files stay, for deleting one would let two processes lock two files."""
        with _guard:
            if self._right < 0:
                return
            # A forked child has inherited the descriptors, and must not say for its parent that nobody watches.
            mine = [_held.pop(key, None) == os.getpid() for key in self._keys]
            try:
                if self._notice is not None and all(mine):
                    os.ftruncate(self._notice, 0)
            finally:
                if self._notice is not None:
                    os.close(self._notice)
                os.close(self._right)
                self._right = -1


def watcher(folder: Path) -> int | None:
    """The number of the process that writes the history in a folder; None where nobody does.

    Nothing is taken or changed; reading the lock file is right enough. None also where that right is missing,
    or where a reader's lock hides the watch's own and this user may not see its process.
    """
    with _guard:
        return _asked(folder)


def _right(folder: Path) -> int:
    path = folder / WRITE_LOCK
    try:
        descriptor = open_plain(path, os.O_RDWR | os.O_CREAT, 0o600)
    except OSError as error:
        # Only the owner may open it; others are told who holds it, as far as they may know.
        if (holder := _asked(folder)) is not None:
            raise _is_held(folder, holder) from error
        raise told(error, path) from error
    try:
        if os.fstat(descriptor).st_uid == os.geteuid():
            os.fchmod(descriptor, 0o600)
        fcntl.lockf(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except (BlockingIOError, PermissionError) as error:
        holder = _locked_by(descriptor)[1]
        os.close(descriptor)
        raise _is_held(folder, holder) from error
    except OSError as error:
        os.close(descriptor)
        raise told(error, path) from error
    return descriptor


def _notice(path: Path) -> int | None:
    """Say who watches, where everybody may read it; None where the disk has no room for that file."""
    try:
        descriptor = open_plain(path, os.O_RDWR | os.O_CREAT, 0o644)
    except OSError as error:
        if error.errno in _NO_ROOM:
            return None
        raise told(error, path) from error
    with suppress(OSError):
        if os.fstat(descriptor).st_uid == os.geteuid():
            # A service's narrow umask must not keep ordinary users from asking who watches.
            os.fchmod(descriptor, 0o644)
        # Fails where a reader has locked it before; then the process that it names is asked after.
        fcntl.lockf(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    with suppress(OSError):
        # Without room for these words the lock still tells the number.
        os.ftruncate(descriptor, 0)
        os.pwrite(descriptor, (json.dumps(_words()) + "\n").encode("ascii"), 0)
    return descriptor


def _words() -> dict[str, int | str | None]:
    me = this_process()
    return {
        "pid": os.getpid(),
        "since": int(time.time()),
        "started": None if me is None else me.started,
        "boot": None if me is None else me.boot,
    }


def _asked(folder: Path) -> int | None:
    if _is_ours(folder):
        return os.getpid()
    try:
        owners = _owners(folder)
        descriptor = os.open(folder / WATCH_LOCK, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
    except OSError:
        return None
    try:
        about = os.fstat(descriptor)
        if not stat.S_ISREG(about.st_mode) or about.st_uid not in owners or about.st_mode & 0o022:
            return None
        fields = _read(descriptor)
        kind, holder = _locked_by(descriptor)
        if kind == fcntl.F_WRLCK:
            # The kernel says 0 for a holder that has no number here, say one in another container.
            return holder or (fields["pid"] if isinstance(fields.get("pid"), int) else 0)
        named = written(fields)
        return named.pid if named is not None and lives(named, owners) else None
    except OSError:
        return None
    finally:
        os.close(descriptor)


def _is_ours(folder: Path) -> bool:
    for name in (WRITE_LOCK, WATCH_LOCK):
        with suppress(OSError):
            if _held.get(_key((folder / name).lstat())) == os.getpid():
                return True
    return False


def _owners(folder: Path) -> frozenset[int]:
    """Whose word counts: that of the history's owner, before there is one of the folder's, and root's."""
    try:
        owner = (folder / HISTORY).lstat().st_uid
    except FileNotFoundError:
        owner = folder.stat().st_uid
    return frozenset({owner, ROOT})


def _locked_by(descriptor: int) -> tuple[int, int]:
    """The sort of lock that another process holds, and its number, 0 where the kernel does not tell it."""
    question = struct.pack(_FLOCK, fcntl.F_WRLCK, os.SEEK_SET, 0, 0, 0)
    kind, *_, pid = struct.unpack(_FLOCK, fcntl.fcntl(descriptor, fcntl.F_GETLK, question))
    return kind, max(pid, 0)


def _read(descriptor: int) -> dict[str, Any]:
    try:
        found = json.loads(os.pread(descriptor, 400, 0))
    except ValueError:
        return {}
    return found if isinstance(found, dict) else {}


def _key(about: os.stat_result) -> _Key:
    return about.st_dev, about.st_ino


def _is_held(folder: Path, pid: int | None) -> HistoryHeld:
    who = f"process {pid}" if pid else "another process"
    return HistoryHeld(
        f"the history in {plain(str(folder))} is being written by {who}",
        hint="let it do the watching, or end it first",
    )
