"""Waiting for whatever comes first: the next look, a person's choice on the screen, or a signal."""

import os
import select
import signal
from collections.abc import Callable, Iterable
from contextlib import suppress
from types import FrameType, TracebackType
from typing import Self


class Waiting:
    """Waits without waking in between; signals are heard at once. Use it in ``with``."""

    def __init__(self, signals: Iterable[signal.Signals]) -> None:
        """Take these signals over from now until the end of ``with``.

        Args:
            signals: those that are to be heard; may be used in the main thread only.
        """
        self._heard: list[signal.Signals] = []
        self._out, self._in = os.pipe2(os.O_NONBLOCK | os.O_CLOEXEC)
        # Python's handlers run between two steps of the interpreter, but only this ends a wait in the kernel.
        self._wakeup = signal.set_wakeup_fd(self._in, warn_on_full_buffer=False)
        self._before = {one: signal.signal(one, self._note) for one in signals}

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        for one, before in self._before.items():
            signal.signal(one, before)
        signal.set_wakeup_fd(self._wakeup)
        os.close(self._in)
        os.close(self._out)

    def wait(
        self, seconds: float, beside: Callable[[], int | None] = lambda: None
    ) -> tuple[signal.Signals, ...]:
        """Wait until a signal comes, something can be read, or the time is over.

        Args:
            seconds: at most so long.
            beside: gives what else to wait on, or None.

        Returns:
            The signals that came, in order.
        """
        if not self._heard:
            other = beside()
            # poll and no select: a descriptor of any number may be waited on.
            waited = select.poll()
            for one in (self._out, other):
                if one is not None:
                    waited.register(one, select.POLLIN)
            waited.poll(seconds * 1000)
        with suppress(BlockingIOError):
            os.read(self._out, 4096)
        heard, self._heard = tuple(self._heard), []
        return heard

    def _note(self, number: int, _frame: FrameType | None) -> None:
        self._heard.append(signal.Signals(number))
