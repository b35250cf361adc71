"""Which ZFS pool a drive belongs to, as far as the kernel shows it.

It shows little: the pools that are imported, and partitions whose name ZFS gave when it was handed a whole disk
(OpenZFS, zpool_label_name: ``zfs-`` and sixteen digits). Which partition belongs to which pool stays open. So a
drive is said to hold a pool only where there is but one pool; otherwise nothing is said.
"""

import re
from collections.abc import Mapping
from pathlib import Path

from diskwatch.machine.kernel_files import names_in, text_of
from diskwatch.machine.stacks import Stack

_GIVEN = re.compile(r"zfs-[0-9a-f]{16}")
_ANSWERS = frozenset({"ONLINE", "DEGRADED"})


def states(proc_root: Path = Path("/proc")) -> dict[str, str]:
    """The imported pools and the state of each, as the module writes it: ``ONLINE``, ``DEGRADED``, ..."""
    folder = proc_root / "spl" / "kstat" / "zfs"
    found = {name: text_of(folder / name / "state") for name in names_in(folder)}
    return {name: state for name, state in found.items() if state is not None}


def pools(proc_root: Path = Path("/proc")) -> dict[str, bool]:
    """The imported pools, and of each whether it answers; one that is suspended hangs whoever asks it."""
    return {name: state in _ANSWERS for name, state in states(proc_root).items()}


def pool_on(stack: Stack, pools: Mapping[str, bool]) -> str | None:
    """The pool of which a part lies on a drive; None where there is none, or the kernel leaves it open."""
    if len(pools) != 1 or not any(_GIVEN.fullmatch(label) for label in stack.labels):
        return None
    return next(iter(pools))
