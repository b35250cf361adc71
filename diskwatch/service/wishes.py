"""What the owner asks of a running watch: taken up beside its work, and done between two of its rounds."""

import threading
from collections.abc import Callable, Mapping
from contextlib import AbstractContextManager
from functools import partial
from pathlib import Path
from queue import SimpleQueue
from typing import Any

from diskwatch.errors import DiskwatchError, HistoryError
from diskwatch.history.exchange import read
from diskwatch.history.writer import History
from diskwatch.service import requests
from diskwatch.service.arrival import take_in
from diskwatch.service.keeper import Keeper
from diskwatch.service.owner import DEEDS
from diskwatch.service.removal import MOVE, move_house
from diskwatch.service.requests import Answer

_HAND = 1.5
"""Seconds that the answer to a move gets to be written before the watch goes on or ends."""


class Wishes:
    """Takes up the requests in a state folder, one after the other."""

    def __init__(
        self,
        folder: Path,
        keeper: Keeper,
        *,
        between_rounds: Callable[[], AbstractContextManager[None]],
        end: Callable[[], None],
        now: Callable[[], int],
    ) -> None:
        """Take up nothing yet.

        Args:
            folder: the state folder.
            keeper: who changes its history.
            between_rounds: holds the next round back; none may go on from a state that has become another.
            end: lets the watch come to its end, for the history to be moved.
            now: the present, UTC seconds since 1970.
        """
        self._folder = folder
        self._keeper = keeper
        self._between_rounds = between_rounds
        self._end = end
        self._now = now
        self._thread = threading.Thread()
        self._wanted: Path | None = None
        self._outcome: SimpleQueue[Answer | DiskwatchError] = SimpleQueue()

    def look(self) -> None:
        """Take up what waits, in a thread of its own: counting must not wait for it."""
        if requests.waiting(self._folder) and not self._thread.is_alive():
            self._thread = threading.Thread(target=self._take_up, name="takes up requests", daemon=True)
            self._thread.start()

    @property
    def moves(self) -> bool:
        """Whether the watch ends for its history to be moved."""
        return self._wanted is not None

    def moved(self) -> Path | None:
        """Move the history, when all is stored and nobody writes, if that was asked for.

        Returns:
            Where the history lies now, also after a move that failed; None where none was asked for.
        """
        if self._wanted is None:
            return None
        folder = self._folder
        try:
            moved, told = move_house(folder, self._wanted, self._now())
            folder = moved.to
            self._outcome.put(told)
        except DiskwatchError as error:
            self._outcome.put(error)
        self._thread.join(_HAND)
        return folder

    def _take_up(self) -> None:
        deeds = {"import-history": self._import, MOVE: self._move}
        requests.take_up(
            self._folder, deeds | {name: partial(self._owner, deed) for name, deed in DEEDS.items()}
        )

    def _import(self, words: Mapping[str, Any]) -> Answer:
        lines, _ = read(words["text"])
        with self._between_rounds():
            told = self._keeper.change(lambda history: take_in(history, lines, self._now()))
        return Answer(done=told.done, wrong=told.wrong)

    def _owner(
        self, deed: Callable[[History, Mapping[str, Any], int], Answer], words: Mapping[str, Any]
    ) -> Answer:
        with self._between_rounds():
            return self._keeper.change(lambda history: deed(history, words, self._now()))

    def _move(self, words: Mapping[str, Any]) -> Answer:
        """End for the history to be moved: only when all is stored and nobody writes can it be whole."""
        self._wanted = Path(str(words["to"]))
        self._end()
        told = self._outcome.get()
        if isinstance(told, DiskwatchError):
            raise HistoryError(
                f"the watch has not moved it and goes on where it was: {told}",
                hint="or end the watch, run this again with the right to write there, and start the watch anew",
            )
        return told
