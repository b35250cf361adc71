"""One agent a user: two would say everything twice."""

import fcntl
import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from diskwatch.errors import DiskwatchError
from diskwatch.history.guarding import open_plain
from diskwatch.units import plain

FILE = "notices.lock"


@contextmanager
def alone(folder: Path) -> Iterator[None]:
    """Be the only agent of this user for as long as this lasts; the kernel ends it with the process.

    Args:
        folder: the user's own state folder; made where it does not exist.

    Raises:
        DiskwatchError: another agent is at work, or the folder cannot be written.
    """
    path = folder / FILE
    try:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        descriptor = open_plain(path, os.O_RDWR | os.O_CREAT, 0o600)
    except OSError as error:
        raise DiskwatchError(
            f"{plain(str(path))} cannot be written: {error.strerror}", hint="see to that folder first"
        ) from error
    try:
        try:
            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError as error:
            raise DiskwatchError(
                "another agent of yours is telling already", hint="end it first, or leave the telling to it"
            ) from error
        yield
    finally:
        os.close(descriptor)
