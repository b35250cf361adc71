"""What the service tells systemd: that it is ready, that it lives, what it is doing (sd_notify(3)).

The protocol is a datagram to the socket that the environment names; without one nobody wants to know.
"""

import os
import socket
from collections.abc import Mapping
from contextlib import suppress

from diskwatch.records import CallWord
from diskwatch.units import plain, rfc3339

_PATIENCE = 1.0
"""Seconds that the socket may take; systemd reads it at once."""


class Manager:
    """The service manager, where there is one."""

    def __init__(self, address: str | None = None) -> None:
        """Find its socket.

        Args:
            address: of the socket; None for the one that the environment names.
        """
        named = os.environ.get("NOTIFY_SOCKET", "") if address is None else address
        # A name in the abstract namespace is written with an @ in the place of its first byte, which is 0.
        self._address = "\0" + named[1:] if named.startswith("@") else named

    def ready(self) -> None:
        """The watch is at work."""
        self._tell({"READY": "1"})

    def alive(self) -> None:
        """The watch gets on with its work."""
        self._tell({"WATCHDOG": "1"})

    def doing(self, text: str) -> None:
        """What it does, for ``systemctl status``."""
        self._tell({"STATUS": plain(text)})

    def reloading(self) -> None:
        """It takes up other settings; `ready` is told again afterwards."""
        self._tell({"RELOADING": "1"})

    def stopping(self) -> None:
        """It ends."""
        self._tell({"STOPPING": "1"})

    def _tell(self, fields: Mapping[str, str]) -> None:
        if not self._address:
            return
        # That nobody listens is no reason to stop watching.
        with suppress(OSError), socket.socket(socket.AF_UNIX, socket.SOCK_DGRAM) as line:
            line.settimeout(_PATIENCE)
            line.connect(self._address)
            line.sendall("\n".join(f"{name}={value}" for name, value in fields.items()).encode())


def status(calls: Mapping[int, CallWord | None], at: int) -> str:
    """What the watch does, in one line.

    Args:
        calls: the call of each drive that was asked since the watch began.
        at: end of the last round, UTC seconds since 1970.
    """
    known = [word for word in calls.values() if word is not None]
    if not calls:
        return f"Watching; no drive has been found (round of {rfc3339(at)})"
    drives = "1 drive" if len(calls) == 1 else f"{len(calls)} drives"
    worst = f", worst call {max(known, key=lambda word: word.rank)}" if known else ""
    return f"Watching {drives}{worst}; last round {rfc3339(at)}"
