"""Asking what may never answer: a file system on a disk that hangs keeps whoever asks it for its size."""

import queue
import threading
from collections.abc import Callable, Hashable
from typing import Generic, TypeVar

Answer = TypeVar("Answer")


class Patience(Generic[Answer]):
    """Waits a while for an answer, and does not ask again what has not answered yet.

    A thread that is stuck in the kernel cannot be ended; that is why there is never more than one a question.
    """

    def __init__(self, ask: Callable[..., Answer], *, seconds: float = 2.0) -> None:
        """Nothing is asked yet.

        Args:
            ask: what may not come back.
            seconds: how long an answer is waited for.
        """
        self._ask = ask
        self._seconds = seconds
        self._open: set[Hashable] = set()

    def __call__(self, *question: Hashable) -> Answer | None:
        """The answer; None where none came in time, or the same question is open still."""
        if question in self._open:
            return None
        answers: queue.SimpleQueue[Answer] = queue.SimpleQueue()
        self._open.add(question)

        def ask() -> None:
            try:
                answers.put(self._ask(*question))
            finally:
                self._open.discard(question)

        threading.Thread(target=ask, name="measures", daemon=True).start()
        try:
            return answers.get(timeout=self._seconds)
        except queue.Empty:
            return None
