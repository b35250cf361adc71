"""How a command has the history changed: itself where nobody writes it, else by asking the watch that does."""

from collections.abc import Mapping
from pathlib import Path

from diskwatch.cli.common import now
from diskwatch.errors import HistoryHeld
from diskwatch.history.writer import History
from diskwatch.service import requests
from diskwatch.service.owner import DEEDS
from diskwatch.service.requests import Answer


def done(folder: Path, deed: str, words: Mapping[str, object]) -> Answer:
    """Have a deed done, one of `diskwatch.service.owner.DEEDS`.

    Args:
        folder: where the history lies.
        deed: its name.
        words: what it needs, plain JSON values.

    Raises:
        DiskwatchError: it was refused, could not be stored, or this user has no right to it.
    """
    try:
        history = History.open(folder)
    except HistoryHeld:
        return requests.wait(requests.leave(folder, deed, words))
    with history:
        return DEEDS[deed](history, words, now())
