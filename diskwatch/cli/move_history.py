"""Move the history to another folder, say off a drive in trouble.

It is copied exactly, held against the old one row by row, and the old file is kept aside. A pointer stays where
it lay, so that every later command and watch finds it; a watch that runs moves it itself and goes on at the new
place.
"""

import argparse
import os
import sys
from pathlib import Path

from diskwatch.cli.common import now, settings, state_folder
from diskwatch.errors import HistoryHeld, UsageError
from diskwatch.history.lock import watcher
from diskwatch.history.reader import Past
from diskwatch.units import plain


def options(parser: argparse.ArgumentParser) -> None:
    """Options of this command."""
    parser.add_argument("folder", metavar="DIR", help="where it is to lie; made where it does not exist")


def run(args: argparse.Namespace) -> int:
    """Move; 0, 2 where DIR cannot be meant, 3 where there is no history, 4 where it could not be moved."""
    if args.settings is not None:
        settings(args)
    if not args.folder.strip():
        raise UsageError("DIR names no folder", hint="name one on another drive")
    folder, to = state_folder(args), Path(os.path.realpath(args.folder))
    Past.open(folder).close()
    for sentence in _moved(folder, to):
        sys.stdout.write(plain(sentence) + "\n")
    return 0


def _moved(folder: Path, to: Path) -> tuple[str, ...]:
    from diskwatch.service import requests  # noqa: PLC0415 - what is wrong is told of at once
    from diskwatch.service.removal import MOVE, move_house  # noqa: PLC0415 - likewise

    try:
        return move_house(folder, to, now())[1].done
    except HistoryHeld:
        if watcher(folder) is None:
            raise  # it is the new place that is held, and nobody there to ask
        # Names of folders are bytes to the kernel: what is no text comes back from JSON as it went.
        return requests.wait(requests.leave(folder, MOVE, {"to": str(to)})).done
