"""Figures of the last seconds, handed from the watch to whoever looks, through memory and not through a disk.

The file lies in the first of `diskwatch.places.live_folders` that can be written. The last of them is the state
folder, on a real disk: there it is written at most once a minute.

    {"at": 1796126400, "spans": [[1, 1796126400, 10.0, 5, 7, 2048, 2048, 3, 9, 11]], "troubles": [],
     "left_out": {"1": "It is asked less often, since ..."}}

What troubles the watch goes this way too: a history that cannot be written cannot hold why. So does why a drive
was not asked in the last round: it is no event of the drive, and the next round may change it.
"""

import contextlib
import errno
import hashlib
import json
import os
import re
import stat
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from types import MappingProxyType
from typing import Any

from diskwatch import places
from diskwatch.history.guarding import ROOT
from diskwatch.records import IoCounts, IoSpan

FRESH_S = 60
"""Figures older than this are nobody's present any more, seconds."""

DISK_EVERY_S = 60
"""Least time between two writes where the file lies on a real disk, seconds."""

_LARGEST_FILE = 1 << 20
_OURS = re.compile(r"live-[0-9a-f]{16}\.json|\.live-[0-9a-f]{16}\.json\.[0-9]+")
"""Names that only this module gives: figures, and what a watch that was killed left half written."""


def live_name(state: Path) -> str:
    """The file's name: one a state folder, so that two watches on one machine never mix."""
    return f"live-{hashlib.sha256(os.fsencode(state.resolve())).hexdigest()[:16]}.json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Live:
    """What a watch shares of the moment.

    Attributes:
        spans: the last span of every drive.
        troubles: what keeps the watch from doing its work, one sentence each.
        left_out: why drives were not asked in the last round, by the drive's number, one sentence each.
    """

    spans: tuple[IoSpan, ...] = ()
    troubles: tuple[str, ...] = ()
    left_out: Mapping[int, str] = field(default_factory=dict)


class LiveWriter:
    """Shares the figures of one watch; removes them on close.

    That they cannot be shared harms nothing but the view of the moment, so it is no error. Figures of watches
    that were killed would lie there for ever, and are removed when a watch begins.

    Args:
        folder: the state folder of the watch.
    """

    def __init__(self, folder: Path) -> None:
        _clear_up(places.live_folders(folder))
        self._state = folder
        self._name = live_name(folder)
        self._path: Path | None = None
        self._written_at: int | None = None

    def write(
        self,
        spans: Sequence[IoSpan],
        at: int,
        troubles: Sequence[str] = (),
        left_out: Mapping[int, str] = MappingProxyType({}),
    ) -> bool:
        """Share the last span of every drive, what troubles the watch, and which drives it left out.

        Args:
            spans: one a drive.
            at: now, UTC seconds since 1970.
            troubles: one sentence each.
            left_out: by the drive's number, one sentence each.

        Returns:
            Whether these figures were shared; False also where it is too early for a real disk.
        """
        if self._path is not None and self._path.parent == self._state and not self._due(at):
            return False
        told = {
            "at": at,
            "spans": [_row(span) for span in spans],
            "troubles": list(troubles),
            "left_out": {str(number): why for number, why in left_out.items()},
        }
        text = json.dumps(told, separators=(",", ":"))
        for folder in places.live_folders(self._state):
            path = folder / self._name
            try:
                _ready(folder)
                _replace(path, text.encode("ascii"))
            except OSError:
                continue
            self._path, self._written_at = path, at
            return True
        return False

    def _due(self, at: int) -> bool:
        return self._written_at is None or not 0 <= at - self._written_at < DISK_EVERY_S

    def close(self) -> None:
        """Take the figures away."""
        if self._path is not None:
            with contextlib.suppress(OSError):
                self._path.unlink()
            self._path = None


def read_live(folder: Path, now: int) -> Live:
    """What the watch of a state folder shares now.

    Only a file of the history's owner, or of root, that nobody else may write is believed.

    Args:
        folder: the state folder.
        now: UTC seconds since 1970.

    Returns:
        What it shares; nothing where nobody shares anything, or not within the last `FRESH_S` seconds.
    """
    try:
        owner = (folder / places.HISTORY).lstat().st_uid
    except OSError:
        return Live()
    for candidate in places.live_folders(folder):
        # On a real disk it is written rarely, and so it holds good until the next time it is due.
        patience = FRESH_S + (DISK_EVERY_S if candidate == folder else 0)
        found = _believed(candidate / live_name(folder), frozenset({owner, 0}))
        if found is not None and abs(now - found[0]) <= patience:
            return found[1]
    return Live()


def _row(span: IoSpan) -> list[int | float]:
    counts = span.counts
    return [
        span.drive,
        span.at,
        span.seconds,
        counts.reads,
        counts.writes,
        counts.read_bytes,
        counts.write_bytes,
        counts.read_ms,
        counts.write_ms,
        counts.busy_ms,
    ]


def _ready(folder: Path) -> None:
    with contextlib.suppress(FileExistsError):
        folder.mkdir(mode=0o755)
        folder.chmod(0o755)  # whatever the umask: other users may look
    if not _own(folder):
        raise PermissionError(errno.EPERM, os.strerror(errno.EPERM), str(folder))


def _own(folder: Path) -> bool:
    """Whether a folder is this user's or root's: in any other, root could be led through a link."""
    return folder.stat().st_uid in {os.geteuid(), ROOT}


def _clear_up(folders: Sequence[Path]) -> None:
    """Remove figures that no watch writes any more; one that was only held up shares its own again soon."""
    for folder in folders:
        with contextlib.suppress(OSError):
            for path in folder.iterdir() if _own(folder) else ():
                if _OURS.fullmatch(path.name) is not None and _is_left(path):
                    path.unlink()


def _is_left(path: Path) -> bool:
    about = path.lstat()
    return (
        stat.S_ISREG(about.st_mode)
        and about.st_uid in {os.geteuid(), ROOT}
        and abs(time.time() - about.st_mtime) > FRESH_S + DISK_EVERY_S
    )


def _replace(path: Path, content: bytes) -> None:
    """Put a file in place whole, so that no reader ever meets a half."""
    making = path.with_name(f".{path.name}.{os.getpid()}")
    making.unlink(missing_ok=True)
    descriptor = os.open(making, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC, 0o644)
    try:
        with os.fdopen(descriptor, "wb") as file:
            os.fchmod(descriptor, 0o644)
            file.write(content)
        making.replace(path)
    except OSError:
        making.unlink(missing_ok=True)
        raise


def _believed(path: Path, owners: frozenset[int]) -> tuple[int, Live] | None:
    try:
        descriptor = os.open(path, os.O_RDONLY | os.O_NOFOLLOW | os.O_NONBLOCK | os.O_CLOEXEC)
    except OSError:
        return None
    with os.fdopen(descriptor, "rb") as file:
        about = os.fstat(descriptor)
        if not stat.S_ISREG(about.st_mode) or about.st_uid not in owners or about.st_mode & 0o022:
            return None
        try:
            found = json.loads(file.read(_LARGEST_FILE))
            spans = tuple(_span(row) for row in found["spans"])
            # A watch of an older version, still running, tells nothing of those that it left out.
            left_out = {int(number): str(why) for number, why in found.get("left_out", {}).items()}
            troubles = tuple(map(str, found["troubles"]))
            return int(found["at"]), Live(spans=spans, troubles=troubles, left_out=left_out)
        except (OSError, ValueError, KeyError, TypeError, OverflowError, AttributeError):
            return None


def _span(row: list[Any]) -> IoSpan:
    drive, at, seconds, *counts = row
    reads, writes, read_bytes, write_bytes, read_ms, write_ms, busy_ms = map(int, counts)
    return IoSpan(
        drive=int(drive),
        at=int(at),
        seconds=float(seconds),
        counts=IoCounts(
            reads=reads,
            writes=writes,
            read_bytes=read_bytes,
            write_bytes=write_bytes,
            read_ms=read_ms,
            write_ms=write_ms,
            busy_ms=busy_ms,
        ),
    )
