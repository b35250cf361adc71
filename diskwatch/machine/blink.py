"""Makes the activity light of a drive blink, by reading a little of it and resting, again and again.

Past the page cache (open(2), ``O_DIRECT``), since what comes from memory lights no light. Nothing is ever
written.
"""

import mmap
import os
import threading
import time
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

ON, OFF = 0.5, 0.5
"""Seconds of reading and of rest in turn: slow enough to be told from ordinary work."""

_CHUNK = 65_536
_STRIDE = 7_919 * _CHUNK
"""Between two reads, so that a small cache in the drive does not answer instead of it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Lamp:
    """A block device whose light is to blink.

    Attributes:
        node: its device node.
        size: its size in bytes.
    """

    node: Path
    size: int


def blink(lamps: list[Lamp], seconds: float, stop: threading.Event) -> dict[Path, OSError]:
    """Let lights blink in step, until the time is over or somebody says stop.

    A device that does not answer any more is not waited for beyond a moment.

    Args:
        lamps: which.
        seconds: for how long, at most.
        stop: ends it at once.

    Returns:
        Devices that could not be read, and why; they were left alone from then on.
    """
    wrong: dict[Path, OSError] = {}
    end = time.monotonic() + seconds
    threads = [
        threading.Thread(
            target=_blink_one, args=(lamp, end, stop, wrong), name=f"blinks {lamp.node}", daemon=True
        )
        for lamp in lamps
    ]
    try:
        for thread in threads:
            thread.start()
        for thread in threads:
            # In bites, for a wait without end would hear no Ctrl-C.
            while thread.is_alive() and time.monotonic() < end + ON:
                thread.join(0.1)
    finally:
        stop.set()
    return wrong


def _blink_one(lamp: Lamp, end: float, stop: threading.Event, wrong: dict[Path, OSError]) -> None:
    try:
        descriptor = _opened(lamp.node)
    except OSError as error:
        wrong[lamp.node] = error
        return
    place = 0
    last = max(0, lamp.size - _CHUNK) // _CHUNK * _CHUNK
    # Memory that begins at a page, as O_DIRECT wants it.
    with suppress(BufferError), mmap.mmap(-1, _CHUNK) as buffer:
        try:
            while time.monotonic() < end and not stop.is_set():
                rest = time.monotonic() + ON
                while time.monotonic() < min(rest, end) and not stop.is_set():
                    os.preadv(descriptor, [buffer], place)
                    place = 0 if last == 0 else (place + _STRIDE) % last // _CHUNK * _CHUNK
                stop.wait(OFF)
        except OSError as error:
            wrong[lamp.node] = error
        finally:
            os.close(descriptor)


def _opened(node: Path) -> int:
    return os.open(node, os.O_RDONLY | os.O_DIRECT | os.O_NONBLOCK | os.O_CLOEXEC)
