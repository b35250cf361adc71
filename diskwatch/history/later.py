"""Whose notices this user has put off, until when: a small file in the user's own state folder.

    ~/.local/state/diskwatch/later.json
        {"schema": "diskwatch/later/1", "drives": {"NAME": {"until": "2026-12-08T12:00:00Z", "call": "copy"}}}

It is no part of the history, which others read too and which this user may have no right to write. A drive
bears the name that tells it from others wherever it is plugged in. What was put off at one call speaks again at
once when the call becomes a stronger one.
"""

import json
import os
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from diskwatch.errors import DiskwatchError
from diskwatch.history.guarding import open_plain
from diskwatch.records import CallWord, Identity
from diskwatch.units import epoch_of, plain, rfc3339

FILE = "later.json"
SCHEMA = "diskwatch/later/1"
DAYS = 7
"""For how many days notices are put off where nobody says."""

_LARGEST = 1 << 20


@dataclass(frozen=True, slots=True, kw_only=True)
class PutOff:
    """One drive's notices, put off.

    Attributes:
        until: when they may come again, UTC seconds since 1970.
        call: the call that stood when they were put off; None where there was none.
    """

    until: int
    call: CallWord | None

    def silences(self, call: CallWord | None, now: int) -> bool:
        """Whether a notice of a call is to wait; never where the call is stronger than the one put off.

        Args:
            call: the call that a notice would tell of.
            now: UTC seconds since 1970.
        """
        return now < self.until and _rank(call) <= _rank(self.call)


def _rank(call: CallWord | None) -> int:
    return CallWord.LOOK.rank if call is None else call.rank


def name_of(identity: Identity) -> str:
    """What a drive is called in the file: by what tells it from others, wherever it is plugged in."""
    serial = identity.telling_serial
    if serial is not None:
        return f"{identity.model or ''} {serial}".strip()
    return identity.wwn or identity.path


def read(folder: Path, now: int) -> dict[str, PutOff]:
    """All that is put off now, by `name_of`; what is no such file puts nothing off.

    Args:
        folder: the user's own state folder.
        now: UTC seconds since 1970.
    """
    found: dict[str, PutOff] = {}
    for name, told in _drives(folder / FILE).items():
        with suppress(ValueError, KeyError, TypeError):
            word = told["call"]
            one = PutOff(until=epoch_of(told["until"]), call=None if word is None else CallWord(word))
            if now < one.until:
                found[name] = one
    return found


def put_off(folder: Path, identity: Identity, put: PutOff, now: int) -> None:
    """Put a drive's notices off; what ran out meanwhile is forgotten.

    Args:
        folder: the user's own state folder; made where it does not exist.
        identity: the drive.
        put: until when, and at which call.
        now: UTC seconds since 1970.

    Raises:
        DiskwatchError: it cannot be written down.
    """
    path = folder / FILE
    drives = {**read(folder, now), name_of(identity): put}
    text = json.dumps(
        {
            "schema": SCHEMA,
            "drives": {
                name: {"until": rfc3339(one.until), "call": None if one.call is None else one.call.value}
                for name, one in drives.items()
            },
        },
        indent=2,
    )
    try:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        replace_whole(path, text + "\n")
    except OSError as error:
        raise DiskwatchError(
            f"{plain(str(path))} cannot be written: {error.strerror}", hint="see to that folder first"
        ) from error


def _drives(path: Path) -> Mapping[str, Any]:
    try:
        with os.fdopen(open_plain(path, os.O_RDONLY), "rb") as file:
            found = json.loads(file.read(_LARGEST))
        drives = found["drives"] if found["schema"] == SCHEMA else {}
    except (OSError, ValueError, KeyError, TypeError, DiskwatchError):
        return {}
    return drives if isinstance(drives, dict) else {}


def replace_whole(path: Path, text: str) -> None:
    """Put a file of this user's in place: whole or not at all, also where the power goes away in between.

    Raises:
        OSError: it cannot be written; the one that was there before stays.
    """
    making = path.with_name(f".{path.name}.{os.getpid()}")
    try:
        descriptor = os.open(making, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_NOFOLLOW | os.O_CLOEXEC, 0o600)
        with os.fdopen(descriptor, "w", encoding="utf-8") as file:
            file.write(text)
            file.flush()
            os.fsync(file.fileno())
        making.replace(path)
    finally:
        with suppress(OSError):
            making.unlink()
