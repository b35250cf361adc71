"""Whether a process of which a file speaks still lives: its number alone may mean another one by now.

A number is given anew once its process has ended, so a process is known by three things: its number, when it
started (in ticks after the start of the system) and which start of the system that was. The kernel tells all
three in ``/proc`` (proc(5): field 22 of ``stat``; ``sys/kernel/random/boot_id``).
"""

import os
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

_PROC = Path("/proc")
_ENDED = frozenset("ZXx")
"""States of processes that have ended and only wait for their parent to take note (proc(5))."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Process:
    """One process, and no other that ever bore its number.

    Attributes:
        pid: its number.
        started: when it started, in clock ticks after the start of the system.
        boot: the kernel's name for that start of the system.
    """

    pid: int
    started: int
    boot: str


def this_process() -> Process | None:
    """The process that asks; None where ``/proc`` does not tell."""
    return _seen(os.getpid())


def written(fields: Mapping[str, Any]) -> Process | None:
    """The process of which a file speaks; None where it does not say all that tells it from others."""
    pid, started, boot = (fields.get(name) for name in ("pid", "started", "boot"))
    if not isinstance(pid, int) or not isinstance(started, int) or not isinstance(boot, str) or pid <= 0:
        return None
    return Process(pid=pid, started=started, boot=boot)


def lives(process: Process, owners: frozenset[int]) -> bool:
    """Whether a process lives and belongs to one of some users.

    Where this user may not see it (``/proc`` can be mounted so that others' processes are hidden), it counts as
    gone: who cannot be seen is not vouched for.

    Args:
        process: as a file tells of it.
        owners: numbers of users whose word counts.
    """
    try:
        owner = (_PROC / str(process.pid)).stat().st_uid
    except OSError:
        return False
    return owner in owners and _seen(process.pid) == process


def _seen(pid: int) -> Process | None:
    try:
        boot = (_PROC / "sys/kernel/random/boot_id").read_text(encoding="utf-8").strip()
        line = (_PROC / str(pid) / "stat").read_text(encoding="utf-8", errors="replace")
        # The second field is a name in parentheses, in which anything may stand, also a parenthesis.
        fields = line.rpartition(")")[2].split()
        state, started = fields[0], int(fields[19])
    except (OSError, ValueError, IndexError):
        return None
    return None if state in _ENDED else Process(pid=pid, started=started, boot=boot)
