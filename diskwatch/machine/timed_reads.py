"""Reads of a disk, each timed, past every cache of the computer (open(2), ``O_DIRECT``); nothing is written."""

import mmap
import os
import time
from pathlib import Path
from types import TracebackType
from typing import Self

_FLAGS = os.O_RDONLY | os.O_DIRECT | os.O_NONBLOCK | os.O_CLOEXEC


class TimedReads:
    """An open disk; use it as a context manager."""

    def __init__(self, node: Path, largest: int) -> None:
        """Open it.

        Args:
            node: its device node.
            largest: bytes of the largest read that will be asked for.

        Raises:
            OSError: it cannot be opened so.
        """
        self._descriptor = os.open(node, _FLAGS)
        # Memory that begins at a page, as O_DIRECT wants it.
        self._memory = mmap.mmap(-1, largest)
        self.busy_us = 0
        """How long the disk was kept busy so far, microseconds."""

    def read(self, place: int, size: int) -> int | None:
        """Read once.

        Args:
            place: first byte, at the start of a block of 4 KiB.
            size: how many bytes, whole blocks of 4 KiB.

        Returns:
            How long it took, microseconds; None where the disk gave it up, or gave less than was asked for.
        """
        with memoryview(self._memory)[:size] as part:
            began = time.monotonic_ns()
            try:
                got = os.preadv(self._descriptor, [part], place)
            except OSError:
                got = -1
            took = (time.monotonic_ns() - began) // 1000
        self.busy_us += took
        return took if got == size else None

    def __enter__(self) -> Self:
        """The open disk."""
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Close it."""
        self._memory.close()
        os.close(self._descriptor)
