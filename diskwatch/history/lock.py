"""One writer a history: a lock that the kernel takes back whenever its holder ends, however it ends.

The lock is a POSIX record lock on ``watch.lock``: any user who may read the file can ask who holds it without
taking anything. Such a lock is lost as soon as its process closes *any* descriptor of the file; so within the
process that holds it nobody opens the file again, and this module remembers what is held.
"""

import fcntl
import json
import os
import struct
import threading
import time
from pathlib import Path

from diskwatch.errors import HistoryHeld
from diskwatch.history.mishaps import told
from diskwatch.places import WATCH_LOCK
from diskwatch.units import plain

_FLOCK = "hhqqi4x"
"""Linux's ``struct flock``: type, whence, start, length, process; native sizes and gaps (fcntl(2))."""

_guard = threading.Lock()
_held: dict[tuple[int, int], int] = {}
"""Locks held here, by device and inode; the process number, since a forked child inherits this but no lock."""


class WatchLock:
    """The right to write one history, for as long as this object is not released."""

    def __init__(self, descriptor: int, key: tuple[int, int]) -> None:
        self._descriptor = descriptor
        self._key = key

    @classmethod
    def take(cls, folder: Path) -> "WatchLock":
        """Take the right to write the history in a folder.

        Raises:
            HistoryHeld: another process, or this one already, writes it; its number is named.
            HistoryError: the lock file cannot be written.
        """
        path = folder / WATCH_LOCK
        with _guard:
            holder = _asked(path)
            if holder is not None:
                raise _is_held(folder, holder)
            try:
                descriptor = _opened(path)
            except OSError as error:
                raise told(error, path) from error
            try:
                fcntl.lockf(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
                _write(descriptor, json.dumps({"pid": os.getpid(), "since": int(time.time())}) + "\n")
            except (BlockingIOError, PermissionError) as error:
                os.close(descriptor)
                raise _is_held(folder, _asked(path)) from error
            except OSError as error:
                os.close(descriptor)
                raise told(error, path) from error
            about = os.fstat(descriptor)
            key = (about.st_dev, about.st_ino)
            _held[key] = os.getpid()
            return cls(descriptor, key)

    def release(self) -> None:
        """Let others write; the file stays, for deleting it would let two processes lock two files."""
        with _guard:
            if self._descriptor < 0:
                return
            try:
                if _held.pop(self._key, None) == os.getpid():
                    os.ftruncate(self._descriptor, 0)
            finally:
                os.close(self._descriptor)
                self._descriptor = -1


def watcher(folder: Path) -> int | None:
    """The number of the process that writes the history in a folder; None where nobody does.

    Nothing is taken or changed; reading the lock file is right enough. None also where that right is missing.
    """
    with _guard:
        return _asked(folder / WATCH_LOCK)


def _asked(path: Path) -> int | None:
    try:
        about = path.stat()
        if _held.get((about.st_dev, about.st_ino)) == os.getpid():
            return os.getpid()
        descriptor = os.open(path, os.O_RDONLY | os.O_CLOEXEC)
    except OSError:
        return None
    try:
        question = struct.pack(_FLOCK, fcntl.F_WRLCK, os.SEEK_SET, 0, 0, 0)
        answer = struct.unpack(_FLOCK, fcntl.fcntl(descriptor, fcntl.F_GETLK, question))
        if answer[0] == fcntl.F_UNLCK:
            return None
        # The kernel says 0 for a holder that this process cannot see by number, say one in another container.
        return answer[4] if answer[4] > 0 else _written_pid(descriptor)
    except OSError:
        return None
    finally:
        os.close(descriptor)


def _written_pid(descriptor: int) -> int:
    try:
        pid = json.loads(os.pread(descriptor, 200, 0))["pid"]
    except (ValueError, KeyError, TypeError):
        return 0
    return pid if isinstance(pid, int) else 0


def _opened(path: Path) -> int:
    try:
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, 0o644)
    except FileExistsError:
        return os.open(path, os.O_RDWR | os.O_CLOEXEC)
    # A service's narrow umask must not keep ordinary users from asking who watches.
    os.fchmod(descriptor, 0o644)
    return descriptor


def _write(descriptor: int, line: str) -> None:
    os.ftruncate(descriptor, 0)
    os.pwrite(descriptor, line.encode("ascii"), 0)


def _is_held(folder: Path, pid: int | None) -> HistoryHeld:
    who = f"process {pid}" if pid else "another process"
    return HistoryHeld(
        f"the history in {plain(str(folder))} is being written by {who}",
        hint="let it do the watching, or end it first",
    )
