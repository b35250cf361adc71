"""A folder in memory for a rehearsal that keeps nothing, gone with the process that made it, however that ends.

Its maker holds a lock on it, which the kernel takes back whenever the maker ends: so a folder of this name that
nobody holds was left behind by one that was killed, and the next rehearsal removes it.
"""

import contextlib
import fcntl
import os
import shutil
import stat
import tempfile
from collections.abc import Iterator
from pathlib import Path

_MEMORY = Path("/dev/shm")  # noqa: S108 - a folder of a name of its own is made in it
_PREFIX = "diskwatch-invented-"


@contextlib.contextmanager
def temporary() -> Iterator[Path]:
    """A folder of its own, in memory where there is room for it, so that no drive is written to for a game."""
    within = _MEMORY if os.access(_MEMORY, os.W_OK | os.X_OK) else Path(tempfile.gettempdir())
    sweep(within)
    folder, held = _made(within)
    try:
        yield folder
    finally:
        shutil.rmtree(folder, ignore_errors=True)
        os.close(held)


def sweep(within: Path) -> None:
    """Remove what rehearsals of this user that were killed left behind; what cannot be removed stays."""
    for folder in within.glob(f"{_PREFIX}*"):
        held = _held(folder)
        if held is not None:
            shutil.rmtree(folder, ignore_errors=True)
            os.close(held)


def _made(within: Path) -> tuple[Path, int]:
    while True:
        folder = Path(tempfile.mkdtemp(prefix=_PREFIX, dir=within))
        held = _held(folder)
        if held is not None:
            return folder, held
        # Another rehearsal that began in this very moment took it for one left behind.


def _held(folder: Path) -> int | None:
    """A descriptor that holds a folder of this user's own; None where it is gone, none, or held by somebody."""
    try:
        held = os.open(folder, os.O_RDONLY | os.O_DIRECTORY | os.O_NOFOLLOW)
    except OSError:
        return None
    try:
        fcntl.flock(held, fcntl.LOCK_EX | fcntl.LOCK_NB)
        seen, named = os.fstat(held), folder.lstat()
        if seen.st_uid == os.geteuid() and os.path.samestat(seen, named) and stat.S_ISDIR(named.st_mode):
            return held
    except OSError:
        pass
    os.close(held)
    return None
