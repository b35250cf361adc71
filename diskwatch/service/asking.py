"""Asks the drives of a round, each in a thread of its own, and hands over what has come in.

One that hangs delays no other; what came in can be kept while the slow ones are still waited for.
"""

import queue
import threading
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from diskwatch.machine.protocol import Found, Machine
from diskwatch.records import Pass
from diskwatch.units import plain

PATIENCE = 3.0
"""Seconds after which what has come in is handed over, and the drives still silent are waited for apart."""

AT_ONCE = 8
"""Drives asked at once: more would only slow each other down on few cores, and look slow to the time-out."""

SLOW = 1.0
"""Seconds after which a drive that has not answered no longer keeps another one waiting."""


@dataclass(frozen=True, slots=True)
class Answer:
    """What came of asking a drive."""

    found: Found
    pass_: Pass


class Asking:
    """The questions of one round."""

    def __init__(self, machine: Machine, drives: Sequence[Found]) -> None:
        """Begin to ask; the machine bounds how long each question takes.

        Args:
            machine: whose drives.
            drives: those to ask.
        """
        self._machine = machine
        self._answers: queue.Queue[Answer] = queue.Queue()
        self.waiting = len(drives)
        """How many answers have not been handed over."""
        places = threading.Semaphore(AT_ONCE)
        for found in drives:
            self._start(found, places)

    def batch(self) -> tuple[Answer, ...]:
        """What comes in, until all is in or nobody has answered for a while; waits for one at least."""
        batch = tuple(self._in_time())
        self.waiting -= len(batch)
        return batch

    def _start(self, found: Found, places: threading.Semaphore) -> None:
        # One that is slow keeps the next from starting for a moment only, and then no longer holds a place.
        if not places.acquire(timeout=SLOW):
            places.release()

        def ask() -> None:
            self._take(found)
            places.release()

        threading.Thread(target=ask, name=f"asks {plain(found.place.device)}", daemon=True).start()

    def _take(self, found: Found) -> None:
        self._answers.put(Answer(found, self._machine.ask(found)))

    def _in_time(self) -> Iterator[Answer]:
        for got in range(self.waiting):
            try:
                # Nothing in hand: wait as long as it takes; the machine bounds every question itself.
                yield self._answers.get(timeout=PATIENCE if got else None)
            except queue.Empty:
                return


class InTurn(Asking):
    """Asks one drive after the other, for a machine that answers at once and whose round must be repeatable."""

    def _start(self, found: Found, places: threading.Semaphore) -> None:
        del places
        self._take(found)
